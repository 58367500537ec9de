"""/v1/devices and /v1/limits: what is held of protective devices, and the loops they allow."""

from typing import Annotated, Any

from fastapi import APIRouter, Path, Query, Request, Response

from faultloop import __version__
from faultloop.api.negotiation import ASKED_LANGUAGE, SVG, drawing, language, media_type, tagged
from faultloop.api.problems import Refused
from faultloop.assessment.limits import loop_limit
from faultloop.assessment.texts import texts
from faultloop.digests import json_bytes, rounded
from faultloop.exchange.resources import Curve, CurveQuery, Designation, DeviceList, LimitBody, LimitQuery
from faultloop.protection.catalogue import catalogue, device_standard, guaranteed, listed_devices
from faultloop.protection.designations import (
    Breaker,
    OvercurrentDevice,
    ResidualDevice,
    UnknownDesignation,
    parse_device,
)
from faultloop.protection.residual import residual_table
from faultloop.reports.curves import device_drawing
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
    return {
        "designation": device.designation,
        "kind": "miniature-circuit-breaker" if breaker else "fuse",
        "standard": device_standard(device),
        "rated_current_a": device.rated_current_a,
    }


@router.get(
    "/devices/{designation}/curve",
    response_model=Curve,
    summary="Guaranteed band of a device",
    responses={200: {"content": {SVG: {"schema": {"type": "string"}}}}},
    openapi_extra=ASKED_LANGUAGE,
)
async def get_device_curve(
    designation: Annotated[Designation, Path()], query: Annotated[CurveQuery, Query()], request: Request
) -> Response:
    """Give the steps that the standard, or the rule set's own table, guarantees, as JSON or drawn as SVG.

    Nothing between the steps is guaranteed.
    """
    device, rules = _device(designation), _rules(query.rules)
    kind = {"json": JSON, "svg": SVG}[query.format] if query.format else media_type(request, (JSON, SVG))
    headers = {"Vary": "Accept, Accept-Language", "Cache-Control": "no-cache"}
    if kind == SVG:
        spoken = language(request)
        body = device_drawing(device, rules, _provenance(rules), spoken)
        return drawing(request, body, {**headers, "Content-Language": spoken})
    return tagged(request, json_bytes(_steps(device, rules)), JSON, headers)


def _steps(device: OvercurrentDevice | ResidualDevice, rules: LoadedRules) -> dict[str, Any]:
    band, scale = guaranteed(device, rules.rules)
    return {
        "designation": device.designation,
        "rules": rules.rules.key,
        "slow": [{"current_a": rounded(i * scale), "time_s": t} for i, t in band.slow],
        "fast": [{"current_a": rounded(i * scale), "time_s": t} for i, t in band.fast],
        "provenance": _provenance(rules),
    }


@router.get(
    "/limits",
    response_model=LimitBody,
    summary="Greatest loop impedance for a device and a time",
    openapi_extra=ASKED_LANGUAGE,
)
async def get_limit(query: Annotated[LimitQuery, Query()], request: Request) -> Response:
    """Give the loop impedance up to which a device is sure to operate within a time."""
    device, rules = _device(query.device, "invalid-query"), _rules(query.rules)
    spoken, voltage = language(request), query.nominal_voltage_to_earth_v
    limit = loop_limit(device, rules.rules, query.time_s, query.policy, voltage, spoken)
    body: dict[str, Any] = {"device": device.designation, "time_s": query.time_s}
    if limit.greatest_loop_impedance_ohm is not None and limit.least_operating_current_a is not None:
        body["greatest_loop_impedance_ohm"] = rounded(limit.greatest_loop_impedance_ohm)
        body["least_operating_current_a"] = rounded(limit.least_operating_current_a)
    told = texts(spoken).cautions
    body["cautions"] = [{"caution": name, "text": told[name].text} for name in rules.rules.cautions]
    body |= {"explanation": limit.explanation, "clause": limit.clause, "provenance": _provenance(rules)}
    headers = {"Content-Language": spoken, "Vary": "Accept-Language"}
    return Response(json_bytes(body), media_type=JSON, headers=headers)
