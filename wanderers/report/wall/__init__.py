"""Sky calendars for the wall: a page a month, a page a year."""

from wanderers.report.wall.document import pages_of, printable_year
from wanderers.report.wall.layout import Paper

__all__ = ["Paper", "pages_of", "printable_year"]
