"""Reading a drawing back: its axes from their labels, its marks and outlines in ampere and second."""

import math
import re
from dataclasses import dataclass
from xml.etree.ElementTree import Element, fromstring

SVG = "{http://www.w3.org/2000/svg}"
UNITS = {"mA": 1e-3, "A": 1.0, "kA": 1e3, "ms": 1e-3, "s": 1.0}
Places = list[tuple[float, float]]


def value(label: str) -> float:
    """A labelled value in ampere or second."""
    number, unit = label.split("\u00a0")
    return float(number) * UNITS[unit]


@dataclass(frozen=True)
class Scale:
    """A logarithmic axis through two of its labels."""

    first: tuple[float, float]
    last: tuple[float, float]

    def value(self, place: float) -> float:
        """Value at a place."""
        (v1, p1), (v2, p2) = self.first, self.last
        return v1 * math.exp(math.log(v2 / v1) * (place - p1) / (p2 - p1))


class Drawn:
    """One drawing, parsed; a document that is not well-formed does not come this far."""

    def __init__(self, body: bytes) -> None:
        self.root = fromstring(body)
        ticks = [text for text in self.all("text") if text.get("class") == "tick"]
        self.x_ticks = [t for t in ticks if t.get("text-anchor") == "middle"]
        self.y_ticks = [t for t in ticks if t.get("text-anchor") == "end"]
        self.x = self._scale(self.x_ticks, "x", 0.0)
        # A label stands with its middle, not its foot, at its line.
        self.y = self._scale(self.y_ticks, "y", 4.0)

    @staticmethod
    def _scale(ticks: list[Element], name: str, foot: float) -> Scale:
        first, last = ((value(t.text or ""), float(t.get(name, "")) - foot) for t in (ticks[0], ticks[-1]))
        return Scale(first, last)

    def all(self, tag: str, kind: str | None = None) -> list[Element]:
        """Elements by tag, and by class where one is named."""
        found = list(self.root.iter(SVG + tag))
        return [e for e in found if kind is None or e.get("class") == kind]

    def texts(self) -> list[str]:
        """Every line of the drawing."""
        return [(text.text or "").replace("\u00a0", " ") for text in self.all("text")]

    @property
    def description(self) -> str:
        """What is said to those who do not see it."""
        return (self.all("desc")[0].text or "").replace("\u00a0", " ")

    @property
    def frame(self) -> tuple[float, float, float, float]:
        """Left, top, right and bottom of the plot."""
        grid = self.all("g", "grid")[0]
        box = {name: float(number) for name, number in grid.findall(f"{SVG}rect")[0].items() if _is_number(number)}
        return box["x"], box["y"], box["x"] + box["width"], box["y"] + box["height"]

    def marks(self, band: Element, filled: bool) -> Places:
        """Marked points of a band in ampere and second: filled for the greatest time, hollow for the least."""
        circles = [c for c in band.iter(f"{SVG}circle") if (c.get("fill") == "#ffffff") != filled]
        return [(self.x.value(float(c.get("cx", ""))), self.y.value(float(c.get("cy", "")))) for c in circles]

    @staticmethod
    def outline(path: Element) -> Places:
        """Corners of a path, in places on the drawing."""
        numbers = [float(n) for n in re.findall(r"-?\d+(?:\.\d+)?", path.get("d", ""))]
        return list(zip(numbers[::2], numbers[1::2], strict=True))


def _is_number(told: str) -> bool:
    return re.fullmatch(r"-?\d+(\.\d+)?", told) is not None


def inside(place: tuple[float, float], corners: Places) -> bool:
    """Whether a place lies within a closed outline (crossings to its right)."""
    x, y = place
    crossed = False
    for (x1, y1), (x2, y2) in zip(corners, [*corners[1:], corners[0]], strict=True):
        if (y1 > y) != (y2 > y) and x < x1 + (y - y1) / (y2 - y1) * (x2 - x1):
            crossed = not crossed
    return crossed
