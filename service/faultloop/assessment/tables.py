"""The tables that points are judged by: rule sets, and every device under each of them, as rows."""

from dataclasses import dataclass
from functools import lru_cache

from faultloop.assessment.rule_table import RuleTable, compile_rules
from faultloop.protection.band import BandTable, compile_bands
from faultloop.protection.catalogue import bands_under, listed_devices
from faultloop.protection.designations import OvercurrentDevice
from faultloop.rules.loader import LoadedRules, shipped

NO_DEVICE = -1
# A service meets few callers' sets at a time; what is pushed out is compiled again.
TABLES_KEPT = 32


@dataclass(frozen=True, slots=True)
class Tables:
    """Compiled rule sets and bands: the shipped sets first, then those that callers brought."""

    rules: RuleTable
    overcurrent: BandTable
    rows: dict[LoadedRules, int]
    places: dict[OvercurrentDevice, int]

    def rules_row(self, loaded: LoadedRules) -> int:
        """Row of a rule set."""
        return self.rows[loaded]

    def device_row(self, loaded: LoadedRules, device: OvercurrentDevice) -> int:
        """Row of a device under a rule set; that of no device where it is not held."""
        place = self.places.get(device)
        return NO_DEVICE if place is None else self.rows[loaded] * len(self.places) + place


@lru_cache(maxsize=TABLES_KEPT)
def tables(own: tuple[LoadedRules, ...] = ()) -> Tables:
    """Compile the shipped rule sets and a caller's own; the shipped rows are the same in every table."""
    sets = [*shipped().values(), *own]
    return Tables(
        rules=compile_rules([loaded.rules for loaded in sets]),
        overcurrent=compile_bands([band for loaded in sets for band in bands_under(loaded).values()]),
        rows={loaded: row for row, loaded in enumerate(sets)},
        places={device: place for place, device in enumerate(listed_devices())},
    )
