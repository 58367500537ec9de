"""Fuse-links: gG gates of IEC 60269-1 and families given by published points."""

from functools import lru_cache
from importlib import resources
from typing import Literal

from pydantic import Field

from faultloop.protection.band import Band
from faultloop.rules.strict import Parameter, Sheet, Sourced, Text, read_sheet, read_table, refuse_duplicates

FILES = ("fuses.toml", "fuses_british.toml")


class Point(Sourced):
    """One point of a fuse's band."""

    edge: Literal["slow", "fast"]
    current_a: float
    time_s: float


class Rating(Sheet):
    """The points of one rated current."""

    rated_current_a: float
    points: list[Point]


class Family(Sheet):
    """One fuse system; the energy that a cartridge lets through does not rise with the current."""

    fuse_system: Text
    designation: Text
    also_written: list[Text] = Field(default_factory=list)
    utilisation_category: Literal["gG"] | None = None
    cartridge: bool = True
    overload_share: Parameter | None = None
    standard: Text
    rating: list[Rating]


class FuseTable(Sheet):
    """Everything that the file of fuses says."""

    kind: Literal["fuse"]
    family: list[Family]


@lru_cache(maxsize=1)
def fuse_families() -> dict[str, Family]:
    """Load the fuse systems that come with the package, by their name."""
    folder = resources.files("faultloop.protection") / "data"
    tables = [read_sheet(FuseTable, read_table(folder / name), name) for name in FILES]
    families = [family for table in tables for family in table.family]
    rows = [(f.fuse_system, r.rated_current_a) for f in families for r in f.rating]
    refuse_duplicates(" and ".join(FILES), "family.rating", list(rows))
    return {family.fuse_system: family for family in families}


def fuse_band(rating: Rating) -> Band:
    """Guaranteed band of a fuse-link.

    Parameters
    ----------
    rating : Rating
        Published points of one rated current.

    Returns
    -------
    Band
        Steps at the published points; a family without a lower curve has no fast edge, and then a
        least time of 0 s is taken.

    References
    ----------
    .. [1] IEC 60269-1:2006, Tables 2 and 3; BS 7671 Appendix 3; the source of each point stands in `data/fuses*.toml`.
    """
    edges: dict[str, list[tuple[float, float]]] = {"slow": [], "fast": []}
    for point in rating.points:
        edges[point.edge].append((point.current_a, point.time_s))
    return Band(tuple(sorted(edges["slow"])), tuple(sorted(edges["fast"])))
