"""Readers of finished tables: terminal tables, charts, pages and calendars. No astronomy is computed here."""
