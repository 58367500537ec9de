"""What the protective devices of a bench would do once a planned link is made, by their guaranteed bands."""

import math

from faultloop.assessment.benches.consequences import Seen
from faultloop.assessment.benches.solving import Ends
from faultloop.assessment.benches.texts import BenchTexts
from faultloop.assessment.benches.typical import typical
from faultloop.exchange.bench_networks import BatteryBenchSupply, BenchRequest, BenchSupply, EarthedBenchSupply
from faultloop.exchange.bench_numbers import Body, ends_body, short
from faultloop.exchange.mapping import overcurrent_device
from faultloop.protection.band import Band
from faultloop.protection.catalogue import guaranteed
from faultloop.protection.designations import ResidualDevice
from faultloop.rules.sheets import RuleSet

LEAST_TOLD_A = 1e-6
MILLI = 1000.0


def devices_seen(request: BenchRequest, rules: RuleSet, found: list[Seen], texts: BenchTexts) -> list[Body]:
    """What every device sees and does, supply by supply; a missing device is said."""
    bodies = {supply.id: supply for supply in request.supplies}
    feeding = {supply.fed_from for supply in request.supplies if supply.kind == "separated"}
    told = []
    for of in found:
        supply = bodies[of.supply.id]
        if isinstance(supply, EarthedBenchSupply):
            told.append(_residual(supply, of, rules, texts, ahead=supply.id in feeding))
        told.append(_overcurrent(supply, of, rules, texts))
    # A device that is not stated and sees nothing is not worth a word.
    return [of for of in told if of["outcome"] != "absent" or of["current_a"]["greatest"] > 0.0]


def _between(ends: Ends, scale: float) -> str:
    least, greatest = (0.0 if of < LEAST_TOLD_A else of for of in (float(ends.least), float(ends.greatest)))
    one, other = short(least * scale), short(greatest * scale)
    return one if one == other else f"{one} – {other}"


def _greatest_time(band: Band, scale: float, current: float) -> float:
    """Time within which a band has a current cleared."""
    return min((time for at, time in band.slow if current >= at * scale), default=math.inf)


def _residual(supply: EarthedBenchSupply, of: Seen, rules: RuleSet, texts: BenchTexts, *, ahead: bool) -> Body:
    quoted = {"supply": supply.id, "current": _between(of.residual_a, MILLI)}
    body: Body = {"supply": supply.id, "sees": "residual-current"}
    current = ends_body(float(of.residual_a.least), float(of.residual_a.greatest))
    device = supply.residual_current_device
    if device is None:
        text = texts.seen["residual-absent"].format_map(quoted)
        return {**body, "current_a": current, "outcome": "absent", "text": text}
    told = ResidualDevice(device.rated_residual_operating_current_ma, device.residual_type, device.delay)
    rated = told.rated_ma / MILLI
    outcome, words = "stays", "windings-blind" if ahead else "residual-stays"
    time = math.inf
    if of.residual_a.least >= rated:
        band, scale = guaranteed(told, rules)
        time = _greatest_time(band, scale, float(of.residual_a.least))
        outcome, words = "operates", "residual-slow" if math.isinf(time) else "residual-operates"
    elif of.residual_a.greatest > typical().residual_stays.usual * rated:
        outcome, words = "may-operate", "residual-may"
    quoted |= {"device": told.designation, "rated": f"{told.rated_ma:g}", "time": short(time)}
    text = texts.seen[words].format_map(quoted)
    return {**body, "device": told.designation, "current_a": current, "outcome": outcome, "text": text}


def _overcurrent(supply: BenchSupply, of: Seen, rules: RuleSet, texts: BenchTexts) -> Body:
    assert not isinstance(supply, BatteryBenchSupply)
    quoted = {"supply": supply.id, "current": _between(of.given_a, 1.0)}
    body: Body = {"supply": supply.id, "sees": "current"}
    current = ends_body(float(of.given_a.least), float(of.given_a.greatest))
    if supply.overcurrent_device is None:
        text = texts.seen["overcurrent-absent"].format_map(quoted)
        return {**body, "current_a": current, "outcome": "absent", "text": text}
    device = overcurrent_device(supply.overcurrent_device)
    band, scale = guaranteed(device, rules)
    time = _greatest_time(band, scale, float(of.given_a.least))
    # A standard says of no current below the rated one, which every device carries, that it operates.
    carries = float(of.given_a.greatest) <= supply.overcurrent_device.rated_current_a
    outcome, words = ("stays", "overcurrent-stays") if carries else ("may-operate", "overcurrent-may")
    if math.isfinite(time):
        outcome, words = "operates", "overcurrent-operates"
    quoted |= {"device": device.designation, "time": short(time)}
    text = texts.seen[words].format_map(quoted)
    return {**body, "device": device.designation, "current_a": current, "outcome": outcome, "text": text}
