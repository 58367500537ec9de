"""Mutated and hostile CSV files, and the oracle: what a careful person could read in a cell of a loop reading."""

import random
import re
from collections.abc import Iterator
from dataclasses import dataclass

from tests.exchange.files import GOOD, HEAD, written

LOOP, TIME = "earth_fault_loop_impedance_ohm", "residual_operating_time_ms"
COLUMNS = HEAD.strip().split(",")
SOUND = GOOD.strip().split(",")
READABLE = re.compile(r"([<>]?)\s*(\d+)(?:[.,](\d+))?\s*(?:ohm|ohms|Ohm|Ω|\u2126)?", re.ASCII)
# B32 at 230 V clears up to 0.95 x 230 / 160 ohm; a no-trip reading may stand 0.5 ohm and its uncertainty (10 % and
# 0.05 ohm) above the loop, and then passes with the residual device as its condition. Nothing above that may pass.
GREATEST_OHM = (0.95 * 230 / 160 + 0.5 + 0.05) / 0.9
CELLS = [
    "=1+1", "@SUM(A1)", "+0.62", "-0.62", "=cmd|' /C calc'!A0", "\u202e26.0", "0.62\u200b", "０.６２", "٠.٦٢", "0.6２",
    "½", "0.62e0", "6.2e-1", "1e400", "9" * 400, "0x1", "0b1", "1_0", "0.6.2", "..", ".", ",", "0.", ".62", "0,,62",
    "NaN", "nan", "inf", "Infinity", "-inf", "null", "None", "true", "[]", "{}", "0.62;0.63", "0.62|", "0.62 mΩ",
    "0.62 MΩ", "0.62 kΩ", "620 mohm", "0.62 V", "0.62 Ω Ω", "<>0.62", ">>2000", "><", ">", "<", ">OL", "OL.", "overload",
    "err", "Error", "#REF!", "#N/A", "#VALUE!", "????", "TBC", "ok", "pass", "PASS", "good", "✓", "yes", "fine", "0.62 ok",
    "approx 0.62", "~0.62", "≈0.62", "≤0.62", "≥2", "0.62±0.1", "0.62-0.70", "0.62..0.70", "0,62,1", "1.234,5", "1,234.5",
    "1'234", "1 234", "0 62", "0\t62", "\x00", "0\x0062", "\x07", "\x1b[31m0.62", "<script>", "{{0.62}}", "${0.62}",
    "%s", "../../etc", "'; DROP TABLE batch; --", "a" * 5000, "0.62" * 2000, "😀", "ﷺ", "é", "\ufeff0.62", "—", "–", "--.--",
]  # fmt: skip
PREMISES = [
    "",
    " ",
    "---",
    "0",
    "-1",
    "1e9",
    "NaN",
    "x" * 300,
    "\x00",
    "😀",
    "=1",
    "TN",
    "tn-s",
    "None",
    "null",
    "B",
    "32",
    "30",
]


@dataclass(frozen=True, slots=True)
class Sent:
    """A file to send, its parameters, and the cell of the loop reading of each row where that is known."""

    name: str
    content: bytes
    query: str = ""
    loops: tuple[str, ...] | None = None


def may_pass(cell: str) -> bool:
    """Whether a careful person could read a number in the cell that allows a pass."""
    match = READABLE.fullmatch(cell.strip())
    if match is None or match[1] == ">":
        return False
    return float(f"{match[2]}.{match[3] or 0}") <= GREATEST_OHM


def row(**cells: str) -> list[str]:
    """The sound row with some cells put in."""
    return [cells.get(column, cell) for column, cell in zip(COLUMNS, SOUND, strict=True)]


def hostile() -> Iterator[Sent]:
    """Hostile cells and hostile files."""
    for at, cell in enumerate(CELLS):
        told = written(COLUMNS, [row(**{LOOP: cell}), SOUND])
        yield Sent(f"loop {at}", told.encode("utf-8", "surrogatepass"), loops=(cell, SOUND[9]))
        for column in (TIME, "external_earth_fault_loop_impedance_ohm"):
            told = written(COLUMNS, [row(**{column: cell})])
            yield Sent(f"{column} {at}", told.encode("utf-8", "surrogatepass"))
    for column in COLUMNS:
        if column not in (LOOP, TIME):
            rows = [row(**{column: cell}) for cell in PREMISES]
            yield Sent(f"premises {column}", written(COLUMNS, rows).encode())
    sound = (HEAD + GOOD).encode()
    for name, content in {
        "nothing": b"",
        "NUL": b"\x00" * 100,
        "only separators": b",,,\n,,,\n",
        "only newlines": b"\n" * 1000,
        "UTF-16": (HEAD + GOOD).encode("utf-16"),
        "Latin-1": "label\nKüche\n".encode("latin-1"),
        "two marks": b"\xef\xbb\xbf\xef\xbb\xbf" + sound,
        "mark amid": sound.replace(b"Bench", b"\xef\xbb\xbfBench"),
        "unclosed": HEAD.encode() + b'S1,"Bench' + GOOD.encode() * 5,
        "quote storm": HEAD.encode() + b'"' * 501,
        "bare returns": sound.replace(b"\n", b"\r"),
        "mixed ends": sound + GOOD.replace("\n", "\r\n").encode() + GOOD.replace("\n", "\r").encode(),
        "no last newline": sound.rstrip(b"\n"),
        "a long row": HEAD.encode() + b"x," * 50_000 + b"\n" + GOOD.encode(),
        "a long cell": HEAD.encode() + b"S1," + b"y" * 200_000 + b",TN-S\n",
        "many columns": b",".join(b"c%d" % at for at in range(20_000)) + b"\n1\n",
        "headings twice": HEAD.encode() + HEAD.encode() + GOOD.encode(),
        "another separator": sound.replace(b",", b"|"),
        "JSON": b'{"rows": []}',
        "HTML": b"<!doctype html><table><tr><td>0.62</table>",
        "zip": b"PK\x03\x04" + bytes(range(256)),
        "formula heading": b"=1+1,label\n1,2\n",
        "control characters": bytes(range(1, 32)) + sound,
    }.items():
        yield Sent(name, content)
    for query in ("?decimal=", "?default=", "?default==", "?default=label", "?ignore=", "?ignore=label&ignore=label",
                  "?default=label=%00", "?default=rules=none", "?default=length_m=OL", "?decimal=comma&decimal=point",
                  "?default=" + "x" * 5000, "?x=1", "?default=earthing=TT&default=earthing=TN-S"):  # fmt: skip
        yield Sent(f"query {query[:40]}", sound, query)
    yield Sent("all headings passed over", sound, "?" + "&".join(f"ignore={column}" for column in COLUMNS))


def mutated(count: int, seed: int = 20261201) -> Iterator[Sent]:
    """Sound files with wounds: in one cell of a reading, in the text at large, or in the bytes."""
    chance = random.Random(seed)
    alphabet = "0123456789.,<>ΩOlk-+ eE*mMV\t'\";~?"
    for at in range(count):
        cells = [f"0.{chance.randint(40, 69)}" for _ in range(chance.randint(1, 12))]
        rows = [row(**{LOOP: cell, "point_id": f"P{number}"}) for number, cell in enumerate(cells)]
        way = at % 4
        if way < 2:
            for _ in range(chance.randint(1, 3)):
                number = chance.randrange(len(rows))
                rows[number][9] = cells[number] = _wounded(chance, cells[number], alphabet)
            separator = chance.choice(",;\t")
            text = written(COLUMNS, rows, separator)
            query = chance.choice(["", "", "?decimal=comma", "?decimal=point"])
            yield Sent(f"cell {at}", text.encode(), query, tuple(cells))
            continue
        content = bytearray(written(COLUMNS, rows).encode())
        for _ in range(chance.randint(1, 4)):
            place = chance.randrange(len(content))
            if way == 2:
                content[place : place + chance.randint(0, 3)] = chance.choice(alphabet + "\r\n,,,").encode()
            else:
                content[place : place + chance.randint(0, 40)] = bytes(
                    chance.randrange(256) for _ in range(chance.randint(0, 4))
                )
        yield Sent(f"bytes {at}", bytes(content))


def _wounded(chance: random.Random, cell: str, alphabet: str) -> str:
    place, way = chance.randrange(len(cell) + 1), chance.randrange(4)
    if way == 0:
        return cell[:place] + chance.choice(alphabet) + cell[place:]
    if way == 1:
        return cell[:place] + cell[place + 1 :]
    if way == 2:
        return cell[:place] + chance.choice(alphabet) + cell[place + 1 :]
    return chance.choice(CELLS[:90])
