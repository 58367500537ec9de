"""Moulded-case circuit-breakers by their settings (IEC 60947-2)."""

import math
from dataclasses import dataclass

from faultloop.protection.band import Band
from faultloop.protection.breakers import breaker_table

# No overload release is set so far below its breaker's rating (assumption); a multiple of In would be.
LEAST_OVERLOAD_SHARE = 0.1


@dataclass(frozen=True, slots=True)
class Settings:
    """What is set on the breaker: currents [A], and the greatest time of the delayed stage with its tolerance [s]."""

    overload_a: float
    short_time_a: float | None = None
    short_time_s: float | None = None
    instantaneous_a: float | None = None


@dataclass(frozen=True, slots=True)
class MouldedCase:
    """A moulded-case circuit-breaker as it is set."""

    rated_current_a: float
    settings: Settings

    @property
    def designation(self) -> str:
        """What the breaker is called, with its settings."""
        told = self.settings
        parts = [f"Ir {told.overload_a:g} A"]
        if told.short_time_a is not None:
            parts.append(f"Isd {told.short_time_a:g} A ≤ {told.short_time_s:g} s")
        if told.instantaneous_a is not None:
            parts.append(f"Ii {told.instantaneous_a:g} A")
        return f"MCCB {self.rated_current_a:g} A ({', '.join(parts)})"

    @property
    def band(self) -> Band:
        """What the standard guarantees at the settings."""
        return moulded_case_band(self.settings)


def refuse_settings(rated_current_a: float, settings: Settings) -> None:
    """Refuse settings that cannot stand on one breaker.

    Parameters
    ----------
    rated_current_a : float
        Rated current [A].
    settings : Settings
        Settings of the releases.

    Raises
    ------
    ValueError
        If the overload setting is above the rated current or far below it (a multiple in place of amperes), a
        short-circuit stage is not above the overload setting, the instantaneous stage is not above the delayed
        one, or the delayed stage has a current without a time or a time without a current.
    """
    magnetic = [stage for stage in (settings.short_time_a, settings.instantaneous_a) if stage is not None]
    if settings.overload_a < LEAST_OVERLOAD_SHARE * rated_current_a:
        raise ValueError("Ir is far below the rated current In; settings are in ampere, not in multiples")
    if settings.overload_a > rated_current_a:
        raise ValueError("the overload setting Ir cannot be above the rated current In")
    if any(stage <= settings.overload_a for stage in magnetic):
        raise ValueError("Isd and Ii must be above Ir; settings are in ampere, not in multiples")
    if (settings.short_time_a is None) != (settings.short_time_s is None):
        raise ValueError("the delayed stage needs both its current Isd and its greatest time")
    if len(magnetic) == 2 and magnetic[1] <= magnetic[0]:
        raise ValueError("Ii must be above Isd")


def moulded_case_band(settings: Settings) -> Band:
    """Guaranteed band of a moulded-case breaker.

    Parameters
    ----------
    settings : Settings
        Settings of the releases; currents in ampere, times in second.

    Returns
    -------
    Band
        Steps at the tested currents: 1.05 and 1.30 Ir for the overload release, and 0.8 and 1.2 times the
        setting of each short-circuit release.  The time setting tr promises nothing, because the standard
        leaves its tolerance to the maker.

    References
    ----------
    .. [1] IEC 60947-2:2006, Table 6 and 8.3.3.1.2.
    """
    table = breaker_table("K")
    conventional, tested = table.conventional, table.instantaneous.time.value
    tolerance = table.magnetic_tolerance.value / 100.0 if table.magnetic_tolerance else 1.0
    hours = conventional.time_to_63_a if settings.overload_a <= 63 else conventional.time_above_63_a
    stages = [(settings.short_time_a, settings.short_time_s), (settings.instantaneous_a, tested)]
    told = [(current, time) for current, time in stages if current is not None and time is not None]
    tripping = [(conventional.tripping.value * settings.overload_a, hours.value * 3600.0)]
    tripping += [((1.0 + tolerance) * current, time) for current, time in told]
    slow: list[tuple[float, float]] = []
    for current, time in sorted(tripping):
        # A stage that promises nothing quicker than one of a lower current is no step.
        if not slow or (current > slow[-1][0] and time < slow[-1][1]):
            slow.append((current, time))
    held = min(((1.0 - tolerance) * current for current, _ in told), default=math.inf)
    not_tripping = conventional.non_tripping.value * settings.overload_a
    fast = [(min(not_tripping, held), hours.value * 3600.0)]
    if not_tripping < held < math.inf:
        fast.append((held, tested))
    return Band(tuple(slow), tuple(fast))
