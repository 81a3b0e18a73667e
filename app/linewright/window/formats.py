"""File formats the window offers, by suffix."""

SUFFIX = ".linewright.json"
TABLES = ("ecsv", "csv", "tex", "vot", "mrt")
FIGURES = ("pdf", "svg", "png")
