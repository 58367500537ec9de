"""/v1/separated-supplies: judge one separating transformer and what hangs on it."""

from fastapi import APIRouter, Request, Response

from faultloop.api.bodies import DirectRoute, json_body, read_ruled, refuse_duplicates
from faultloop.api.negotiation import ASKED_LANGUAGE, language
from faultloop.digests import canonical_bytes, json_bytes, sha256
from faultloop.exchange.answers import Assessment
from faultloop.exchange.render import request_bytes
from faultloop.exchange.separated_supplies import SeparatedSupplyRequest, as_assessment

router = APIRouter(prefix="/v1/separated-supplies", tags=["supplies"], route_class=DirectRoute)


@router.post(
    "",
    response_model=Assessment,
    openapi_extra=json_body("SeparatedSupplyRequest") | ASKED_LANGUAGE,
    summary="Judge one separating transformer and what hangs on it; store nothing",
)
async def judge_separated_supply(request: Request) -> Response:
    """Say whether the supply floats, what a contact with one pole carries, and whether a second fault is cleared.

    The same may be asked, and stored, as an assessment of an outlet whose supply has earthing "separated".
    """
    asked, raw = await read_ruled(request, SeparatedSupplyRequest)
    refuse_duplicates(raw, canonical_bytes(asked.model_dump(mode="json", by_alias=True, exclude_unset=True)))
    body, spoken = as_assessment(asked, request.app.state.own_rules.by_name), language(request)
    answer = await request.app.state.gather.assess(body, sha256(request_bytes(body)), spoken)
    headers = {"Cache-Control": "no-store", "Content-Language": spoken, "Vary": "Accept-Language"}
    return Response(json_bytes(answer), media_type="application/json", headers=headers)
