"""Text for drawings: only characters that XML can carry, broken into lines that fit without knowing the font."""

import re
import unicodedata

# What XML 1.0 cannot carry, escaped or not.
_UNWRITABLE = re.compile("[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
# A no-break space is none of these: it keeps a number and its unit together.
_SPACE = re.compile("[\t\n\r ]+")
# Wider than the letters of usual fonts are on average, so that a line never runs out of its place.
_LETTER, _WIDE = 0.58, 1.05


def clean(text: str) -> str:
    """The text on one line, with a mark in place of each character that XML cannot carry."""
    return _SPACE.sub(" ", _UNWRITABLE.sub("\ufffd", text)).strip(" ")


def width(text: str, size: float) -> float:
    """Length that the text may need at a font size."""
    wide = sum(unicodedata.east_asian_width(letter) in "WF" for letter in text)
    return size * (_LETTER * (len(text) - wide) + _WIDE * wide)


def wrapped(text: str, size: float, room: float) -> list[str]:
    """Lines no longer than the room; a word that alone is too long is cut."""
    lines, line = [], ""
    for word in clean(text).split(" "):
        rest = word
        while width(rest, size) > room:
            if line:
                lines.append(line)
                line = ""
            cut = next(n for n in range(len(rest), 0, -1) if n == 1 or width(rest[:n], size) <= room)
            lines.append(rest[:cut])
            rest = rest[cut:]
        if line and width(f"{line} {rest}", size) > room:
            lines.append(line)
            line = rest
        else:
            line = f"{line} {rest}".strip()
    return [*lines, line] if line else lines
