"""Networks written for the general-purpose circuit simulator ngspice (Debian package of that name), and its answers."""

import re
import shutil
import subprocess
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any

import numpy as np

from faultloop.electrical.circuit_elements import (
    Capacitor,
    CurrentSource,
    Element,
    IdealTransformer,
    Inductor,
    Resistor,
    VoltageSource,
)

MISSING = "ngspice is not installed; these checks need it: apt-get install --no-install-recommends ngspice"
Answers = dict[str, Any]


def written(parts: Sequence[Element], prefix: str, frequency: float, exact: bool) -> list[str]:
    """Lines of a netlist for single-valued elements; every node and device carries the prefix.

    With ``exact``, the resistance of an `Impedance` is a current-controlled voltage: ngspice adds up conductances,
    which costs it figures where milliohms stand beside gigaohms.
    """
    lines: list[str] = []
    for part in parts:
        lines += _element(part, prefix, 2.0 * np.pi * frequency, exact)
    return lines


def _element(part: Element, prefix: str, angular: float, exact: bool) -> list[str]:
    """Lines of one element."""
    own = f"{prefix}_{part.name}"

    def node(name: str) -> str:
        return "0" if name == "earth" else f"{prefix}_{name}"

    if isinstance(part, IdealTransformer):
        one, two, three, four = map(
            node, (part.primary_plus, part.primary_minus, part.secondary_plus, part.secondary_minus)
        )
        ratio = float(part.ratio[0])
        return [
            f"e{own} {one} {own}_x {three} {four} {ratio!r}",
            f"v{own} {own}_x {two} dc 0",
            f"f{own} {three} {four} v{own} {-ratio!r}",
        ]
    plus, minus = node(part.plus), node(part.minus)
    if isinstance(part, Resistor):
        return [f"r{own} {plus} {minus} {float(part.resistance_ohm[0])!r}"]
    if isinstance(part, Capacitor):
        return [f"c{own} {plus} {minus} {float(part.capacitance_nf[0]) * 1e-9!r}"]
    if isinstance(part, Inductor):
        return [f"l{own} {plus} {minus} {float(part.inductance_h[0])!r}"]
    if isinstance(part, CurrentSource):
        return [f"i{own} {minus} {plus} dc 0 ac {_polar(part.current_a[0])}"]
    resistance, inductance = float(part.resistance_ohm[0]), float(part.reactance_ohm[0]) / angular
    emf = _polar(part.emf_v[0]) if isinstance(part, VoltageSource) else "0"
    return [
        f"v{own} {plus} {own}_x dc 0 ac {emf}",
        f"h{own} {own}_x {own}_y v{own} {resistance!r}" if exact else f"r{own} {own}_x {own}_y {resistance!r}",
        f"l{own} {own}_y {minus} {inductance!r}",
    ]


def _polar(phasor: complex) -> str:
    """Magnitude and degrees."""
    return f"{float(abs(phasor))!r} {float(np.degrees(np.angle(phasor)))!r}"


def simulated(lines: Sequence[str], frequencies: Sequence[float], folder: Path) -> list[Answers]:
    """Phasors of all nodes, and of currents through sources as ``i(v...)``, at rising frequencies, by one process."""
    program = shutil.which("ngspice")
    assert program, MISSING
    deck, raw = folder / "deck.cir", folder / "deck.raw"
    asked = [f".ac lin 1 {frequency!r} {frequency!r}" for frequency in frequencies]
    deck.write_text("\n".join(["networks", ".options noopac pivrel=0.1", *lines, *asked, ".end", ""]))
    done = subprocess.run(
        [program, "-b", "-n", "-r", raw, deck], capture_output=True, text=True, check=False, timeout=300
    )
    assert done.returncode == 0, done.stdout[-2000:] + done.stderr[-2000:]
    plots = sorted(_plots(raw.read_bytes()), key=lambda plot: plot["frequency"].real)
    assert len(plots) == len(frequencies), done.stdout[-2000:] + done.stderr[-2000:]
    return plots


def _plots(raw: bytes) -> Iterator[Answers]:
    """Plots of a binary raw file, one point each."""
    while raw:
        head, _, raw = raw.partition(b"Binary:\n")
        names = re.findall(r"^\t\d+\t(\S+)\t\S+", head.decode(), flags=re.MULTILINE)
        size = 16 * len(names)
        values = np.frombuffer(raw[:size], np.complex128)
        raw = raw[size:].lstrip(b"\n")
        yield dict(zip(names, values, strict=True))
