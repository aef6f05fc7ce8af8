"""The charts of the report, in one style.

Each chart has three functions: ``draw_x`` returns a finished figure, ``plot_x`` draws into axes that the
caller made (within ``in_force``, so that the caller's own settings of matplotlib do not show), and
``x_alt_text`` says in words what is seen. All take tables and compute no astronomy.
"""

from wanderers.report.charts.brightness import brightness_alt_text, draw_brightness, plot_brightness
from wanderers.report.charts.export import save
from wanderers.report.charts.longitude import draw_longitude, longitude_alt_text, plot_longitude, plot_season
from wanderers.report.charts.overview import draw_overview, overview_alt_text, plot_overview
from wanderers.report.charts.path import draw_path, path_alt_text, path_span, plot_latitude, plot_path
from wanderers.report.charts.style import LIGHT, NIGHT, Style, in_force

__all__ = [
    "LIGHT",
    "NIGHT",
    "Style",
    "brightness_alt_text",
    "draw_brightness",
    "draw_longitude",
    "draw_overview",
    "draw_path",
    "in_force",
    "longitude_alt_text",
    "overview_alt_text",
    "path_alt_text",
    "path_span",
    "plot_brightness",
    "plot_latitude",
    "plot_longitude",
    "plot_overview",
    "plot_path",
    "plot_season",
    "save",
]
