"""/v1/devices and /v1/limits: what is held of protective devices, and the loops they allow."""

from typing import Annotated, Any

from fastapi import APIRouter, Path, Query, Response

from faultloop import __version__
from faultloop.api.problems import Refused
from faultloop.assessment.limits import loop_limit
from faultloop.digests import json_bytes, rounded
from faultloop.exchange.resources import Curve, Designation, DeviceList, LimitBody, LimitQuery, RulesQuery
from faultloop.protection.band import Band
from faultloop.protection.breakers import breaker_table
from faultloop.protection.catalogue import catalogue, device_band, listed_devices
from faultloop.protection.designations import (
    Breaker,
    OvercurrentDevice,
    ResidualDevice,
    UnknownDesignation,
    parse_device,
)
from faultloop.protection.fuses import fuse_families
from faultloop.protection.residual import residual_table
from faultloop.rules.loader import LoadedRules, resolve

router = APIRouter(prefix="/v1", tags=["devices"])
JSON = "application/json"


def _device(designation: str, otherwise: str = "not-found") -> OvercurrentDevice | ResidualDevice:
    try:
        return parse_device(designation)
    except UnknownDesignation as error:
        raise Refused(otherwise, str(error)) from None


def _rules(name: str) -> LoadedRules:
    rules = resolve(name)
    assert rules is not None, "the query model refuses unknown rule sets"
    return rules


def _provenance(rules: LoadedRules) -> dict[str, str]:
    return {
        "engine": __version__,
        "rules": rules.rules.key,
        "rules_digest": rules.digest,
        "devices_digest": catalogue().digest,
    }


@router.get("/devices", response_model=DeviceList, summary="List the devices whose bands are held here")
async def list_devices() -> Response:
    """Give every device by its trade shorthand."""
    items: list[dict[str, Any]] = [_listed(device) for device in listed_devices()]
    for delay in ("general", "selective"):
        for rated in residual_table().rated_residual_operating_currents_ma:
            told = ResidualDevice(rated, delay=delay)
            items.append(
                {
                    "designation": told.designation,
                    "kind": "residual-current-device",
                    "standard": residual_table().standard,
                    "rated_residual_operating_current_ma": rated,
                    "delay": delay,
                }
            )
    return Response(json_bytes({"items": items}), media_type=JSON)


def _listed(device: OvercurrentDevice) -> dict[str, Any]:
    breaker = isinstance(device, Breaker)
    standard = breaker_table().standard if isinstance(device, Breaker) else fuse_families()[device.fuse_system].standard
    return {
        "designation": device.designation,
        "kind": "miniature-circuit-breaker" if breaker else "fuse",
        "standard": standard,
        "rated_current_a": device.rated_current_a,
    }


@router.get("/devices/{designation}/curve", response_model=Curve, summary="Guaranteed band of a device")
async def get_device_curve(
    designation: Annotated[Designation, Path()], query: Annotated[RulesQuery, Query()]
) -> Response:
    """Give the steps that the standard, or the rule set's own table, guarantees; nothing between them is."""
    device, rules = _device(designation), _rules(query.rules)
    band, scale = _band(device, rules)
    body = {
        "designation": device.designation,
        "rules": rules.rules.key,
        "slow": [{"current_a": rounded(i * scale), "time_s": t} for i, t in band.slow],
        "fast": [{"current_a": rounded(i * scale), "time_s": t} for i, t in band.fast],
        "provenance": _provenance(rules),
    }
    return Response(json_bytes(body), media_type=JSON)


def _band(device: OvercurrentDevice | ResidualDevice, rules: LoadedRules) -> tuple[Band, float]:
    if isinstance(device, ResidualDevice):
        return catalogue().residual_bands[device.delay], device.rated_ma / 1000.0
    return device_band(device, rules.rules), 1.0


@router.get("/limits", response_model=LimitBody, summary="Greatest loop impedance for a device and a time")
async def get_limit(query: Annotated[LimitQuery, Query()]) -> Response:
    """Give the loop impedance up to which a device is sure to operate within a time."""
    device, rules = _device(query.device, "invalid-query"), _rules(query.rules)
    limit = loop_limit(device, rules.rules, query.time_s, query.policy, query.nominal_voltage_to_earth_v)
    body: dict[str, Any] = {"device": device.designation, "time_s": query.time_s}
    if limit.greatest_loop_impedance_ohm is not None and limit.least_operating_current_a is not None:
        body["greatest_loop_impedance_ohm"] = rounded(limit.greatest_loop_impedance_ohm)
        body["least_operating_current_a"] = rounded(limit.least_operating_current_a)
    body |= {"explanation": limit.explanation, "clause": limit.clause, "provenance": _provenance(rules)}
    return Response(json_bytes(body), media_type=JSON)
