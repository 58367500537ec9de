"""The worked bench beside the circuit simulator ngspice, from a netlist that is written by hand."""

from pathlib import Path

import pytest

from faultloop import bench_network
from tests.assessment.bench_bodies import clip_case
from tests.reference.ngspice import simulated

# 500 VA at 230 V with 6 %: 0.06·230²/500 Ω, taken as leakage.
LEAKAGE_H = 0.06 * 230.0**2 / 500.0 / 314.1592653589793
PRINTED = 5e-6  # half of the last of six digits
BODY = "rbody_{0} {0}_l1 0 1000"
CLIP = "rclip_{0} {0}_ground {0}_l2 0.1"


def netlist(prefix: str, *more: str) -> list[str]:
    """Eight instruments of 2.2 nF and a set of 4.7 nF on one transformer, earth contacts wired through by 0.1 Ω."""
    lines = [
        f"vsource_{prefix} {prefix}_e {prefix}_l2 dc 0 ac 230 0",
        f"lsource_{prefix} {prefix}_e {prefix}_l1 {LEAKAGE_H!r}",
        f"rbond_{prefix} {prefix}_bond 0 0.1",
        f"rground_{prefix} {prefix}_ground {prefix}_case0 0.1",
    ]
    for at, nanofarads in enumerate([2.2] * 8 + [4.7]):
        case = f"{prefix}_case{at}"
        lines += [
            f"rcase_{prefix}{at} {case} {prefix}_bond 0.1",
            f"cone_{prefix}{at} {prefix}_l1 {case} {nanofarads}n",
            f"ctwo_{prefix}{at} {prefix}_l2 {case} {nanofarads}n",
        ]
    return lines + [line.format(prefix) for line in more]


def test_contacts_and_the_clip_of_the_worked_bench(tmp_path: Path) -> None:
    lines = netlist("found", BODY) + netlist("clipped", BODY, CLIP) + netlist("made", CLIP)
    (theirs,) = simulated(lines, [50.0], tmp_path)
    answer = bench_network(clip_case())
    pole = next(c for c in answer["contacts"] if (c["from"], c["to"]) == ("isolating.L1", "earth"))
    for field, prefix in (("as_found", "found"), ("with_planned_link", "clipped")):
        expected = 1000.0 * abs(theirs[f"v({prefix}_l1)"]) / 1000.0
        assert pole[field]["current_ma"]["greatest"] == pytest.approx(expected, rel=PRINTED)
    through = 1000.0 * abs(theirs["v(made_ground)"] - theirs["v(made_l2)"]) / 0.1
    assert answer["planned_link"]["current_ma"]["greatest"] == pytest.approx(through, rel=PRINTED)
    (node,) = (node for node in answer["nodes"] if node["node"] == "isolating.L1")
    stands = node["with_planned_link"]["potential_v"]["greatest"]
    assert stands == pytest.approx(abs(theirs["v(made_l1)"]), rel=PRINTED)
