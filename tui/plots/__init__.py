"""Pictures in terminal cells, as SVG and as CSV. Pure functions: they know no screen and no walk."""

from tui.plots.chart import NO_VALUE, Axis, Chart, Grid, Rule, Series, Spot, Unsolved
from tui.plots.drawing import draw
from tui.plots.paint import Depth, Glyphs, depth_of_terminal, glyphs_of

__all__ = [
    "NO_VALUE", "Axis", "Chart", "Depth", "Glyphs", "Grid", "Rule", "Series", "Spot", "Unsolved", "depth_of_terminal", "draw", "glyphs_of",
]  # fmt: skip
