"""A sheet of SVG on which a drawing is made from the top down; every text is escaped by the writer."""

from xml.etree.ElementTree import Element, SubElement, indent, tostring

from faultloop.reports.lettering import clean, wrapped

MARGIN = 16.0
SMALL, PLAIN, LARGE = 10.0, 12.0, 17.0
PAPER, INK, GREY, FAINT = "#ffffff", "#111111", "#9a9a9a", "#dedede"
FONT = "'DejaVu Sans', Verdana, Arial, sans-serif"


def number(value: float) -> str:
    """A number with at most two decimals."""
    return f"{value:.2f}".rstrip("0").rstrip(".")


def put(parent: Element, tag: str, **attributes: float | str) -> Element:
    """Add an element; numbers are written with at most two decimals."""
    told = {
        name.rstrip("_").replace("_", "-"): value if isinstance(value, str) else number(value)
        for name, value in attributes.items()
    }
    return SubElement(parent, tag, told)


class Sheet:
    """One document being drawn; `y` is where the next line stands."""

    def __init__(self, key: str, language: str, title: str, description: str, width: float) -> None:
        self.key, self.width, self.y = key, width, 0.0
        names = {"xmlns": "http://www.w3.org/2000/svg", "xml:lang": language, "lang": language}
        self.root = Element("svg", names | {"role": "img", "aria-labelledby": self.id("title") + " " + self.id("desc")})
        put(self.root, "title", id=self.id("title")).text = clean(title)
        put(self.root, "desc", id=self.id("desc")).text = clean(description)
        self.defs = put(self.root, "defs")
        self.paper = put(self.root, "rect", width="100%", height="100%", fill=PAPER)
        self.sheet = put(self.root, "g", font_family=FONT, font_size=PLAIN, fill=INK)

    def id(self, name: str) -> str:
        """An id that stays its own where several drawings stand on one page."""
        return f"{self.key}-{name}"

    def write(self, text: str, x: float, y: float, **style: float | str) -> None:
        """One line of text."""
        put(self.sheet, "text", x=x, y=y, **style).text = clean(text)

    def lines(self, text: str, size: float, left: float = MARGIN, after: float = 0.0, **style: float | str) -> None:
        """A paragraph, broken to the width of the sheet; more letters fit in none of the usual fonts."""
        heavy = 1.15 if style.get("font_weight") == "bold" else 1.0
        for line in wrapped(text, size * heavy, self.width - MARGIN - left):
            self.y += size * 1.35
            self.write(line, left, self.y, font_size=size, **style)
        self.y += after

    def written(self) -> bytes:
        """The document, as high as what was drawn."""
        height = self.y + MARGIN
        self.root.set("viewBox", f"0 0 {number(self.width)} {number(height)}")
        self.root.set("width", number(self.width))
        self.root.set("height", number(height))
        indent(self.root, " ")
        written: bytes = tostring(self.root, encoding="utf-8", xml_declaration=True)
        return written
