"""A campaign as files: page, field sheet, charts, tables, calendar."""
