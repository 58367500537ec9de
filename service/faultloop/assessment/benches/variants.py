"""What is not known of a bench, as choices that are all solved."""

from collections.abc import Sequence
from dataclasses import replace
from itertools import combinations

from faultloop.assessment.benches.network import Bench, Span
from faultloop.assessment.benches.wires import OWN, Part, Variant

MOST_CHASSIS_POLED = 4


def open_resistances(bench: Bench) -> list[Part]:
    """Resistances of links, signal grounds and chassis that are known only between two ends."""
    parts = [("signal-ground", item.id, item.ground_ohm) for item in bench.items]
    parts += [("chassis", item.id, item.chassis_ohm) for item in bench.items]
    parts += [("link", link.id, link.ohm) for link in bench.all_links]
    return sorted((kind, owner) for kind, owner, span in parts if span is not None and span.open)


def variants_of(bench: Bench) -> tuple[Variant, ...]:
    """What is solved beside the nominal: both ends of all that is not known, and the primary poled either way.

    Of resistances that are not known every choice of ends is solved, with all capacitances at their greatest; the
    windings pull a pole one way and what leads to earth the other, so these are put at opposite ends too.  A chassis
    that nobody described is put at either pole, one by one and all together.
    """
    windings = [supply.interwinding_nf for supply in bench.supplies]
    others = [supply.cable_nf for supply in bench.supplies]
    others += [span for item in bench.items for span in (item.filter_nf, item.ground_nf)]
    spans = [supply.source_ohm for supply in bench.supplies] + [item.load_ohm for item in bench.items]
    parts = open_resistances(bench)
    found = [Variant("nominal")]
    if parts or _any_open([*windings, *others, *spans]):
        found += [Variant(level) for level in ("low", "high")]
    if _any_open(windings) and _any_open(others):
        found += [Variant("high", least=which) for which in ("windings", "others")]
    chosen = (some for size in range(1, len(parts) + 1) for some in combinations(parts, size))
    found += [Variant("high", against=frozenset(some)) for some in chosen]
    found += [Variant("high", chassis=joined) for joined in _chassis(bench)]
    unscreened = [supply.interwinding_nf for supply in bench.supplies if not supply.screen]
    poled = any(windings is not None and windings.greatest > 0.0 for windings in unscreened)
    separated = [supply.id for supply in bench.supplies if supply.kind == "separated"]
    # How two transformers are poled to each other is not known either: all are turned together, and each by itself.
    over = [frozenset[str](), *([frozenset([*separated, OWN])] if poled else [])]
    found_over = [replace(variant, turned=turned) for turned in over for variant in found]
    several = separated if len(separated) > 1 else []
    few = [variant for variant in found if len(variant.chassis) != 1] if _many_chassis(bench) else found
    return (*found_over, *(replace(variant, turned=frozenset([one])) for one in several for variant in few))


def _many_chassis(bench: Bench) -> bool:
    """Whether so many chassis are open that of several supplies' polings only all of them together are solved."""
    return sum(item.chassis_open for item in bench.items) > MOST_CHASSIS_POLED


def _any_open(spans: Sequence[Span | None]) -> bool:
    return any(span is not None and span.open for span in spans)


def _chassis(bench: Bench) -> list[frozenset[tuple[str, str]]]:
    """Ways in which chassis that nobody described may be joined to poles: each by itself, and all of them."""
    items = [item.id for item in bench.items if item.chassis_open]
    found = [frozenset([(item, which)]) for item in items for which in ("L1", "L2")]
    if len(items) > 1:
        found += [frozenset((item, which) for item in items) for which in ("L1", "L2")]
    return found
