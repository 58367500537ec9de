"""Text for drawings: only characters that XML can carry, broken into lines that fit without knowing the font."""

import re
import unicodedata

# What XML 1.0 cannot carry, escaped or not.
_UNWRITABLE = re.compile("[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
# A no-break space is none of these: it keeps a number and its unit together.
_SPACE = re.compile("[\t\n\r ]+")
# Widths in em, no less than those of the widest of the usual fonts, so that a line never runs out of its place.
_NARROW, _PLAIN, _CAPITAL, _BROAD = 0.43, 0.645, 0.8, 1.05
_CLASSES = dict.fromkeys("iljtf.,:;|!'()[] \u00a0·", _NARROW) | dict.fromkeys("wmWM@%×—", _BROAD)


def clean(text: str) -> str:
    """The text on one line, with a mark in place of each character that XML cannot carry."""
    return _SPACE.sub(" ", _UNWRITABLE.sub("\ufffd", text)).strip(" ")


def _letter(letter: str) -> float:
    if letter in _CLASSES:
        return _CLASSES[letter]
    if unicodedata.east_asian_width(letter) in "WF":
        return _BROAD
    return _CAPITAL if letter.isupper() else _PLAIN


def width(text: str, size: float) -> float:
    """Length that the text may need at a font size."""
    return size * sum(map(_letter, text))


def wrapped(text: str, size: float, room: float) -> list[str]:
    """Lines no longer than the room; a word that alone is too long is cut."""
    lines, line = [], ""
    for part in (part for word in clean(text).split(" ") for part in _parts(word, size, room)):
        longer = f"{line} {part}" if line else part
        if line and width(longer, size) > room:
            lines.append(line)
            longer = part
        line = longer
    return [*lines, line] if line else lines


def shortened(text: str, size: float, room: float) -> str:
    """The text, cut behind with a mark where it needs more than the room."""
    text = clean(text)
    if width(text, size) <= room:
        return text
    while text and width(text + "…", size) > room:
        text = text[:-1]
    return text.rstrip(" ") + "…"


def _parts(word: str, size: float, room: float) -> list[str]:
    """The word, cut wherever it would be longer than a line."""
    parts, used = [""], 0.0
    for letter in word:
        used += size * _letter(letter)
        if parts[-1] and used > room:
            parts.append("")
            used = size * _letter(letter)
        parts[-1] += letter
    return parts
