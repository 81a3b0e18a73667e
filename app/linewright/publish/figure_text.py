"""Sizes of text in points, by the font's own metrics (no renderer needed)."""

from __future__ import annotations


class Ruler:
    """Measures text of one font."""

    def __init__(self, font):
        from matplotlib.textpath import TextToPath

        self.font = font
        self._measure = TextToPath().get_text_width_height_descent

    def size(self, text: str, points: float) -> tuple[float, float]:
        """(width, height) in points of ``text`` at this type size."""
        font = self.font.copy()
        font.set_size(points)
        width, height, _ = self._measure(text, font, False)
        return float(width), float(height)

    def widths(self, texts, points: float) -> list[float]:
        known = {text: self.size(text, points)[0] for text in set(texts)}
        return [known[text] for text in texts]

    def line_height(self, points: float) -> float:
        """Height of the tallest line the labels use."""
        return self.size("[Hgpβ₂", points)[1]
