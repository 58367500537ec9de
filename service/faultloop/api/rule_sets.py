"""/v1/rule-sets: the rule sets held here, with every value, clause and source."""

from typing import Annotated, Any

from fastapi import APIRouter, Path, Response

from faultloop.api.problems import Refused
from faultloop.digests import json_bytes
from faultloop.exchange.resources import RuleSetDetail, RuleSetList
from faultloop.rules.loader import LoadedRules, resolve, shipped

router = APIRouter(prefix="/v1/rule-sets", tags=["rule sets"])
JSON = "application/json"


def _listed(loaded: LoadedRules) -> dict[str, Any]:
    rules = loaded.rules
    return {
        "rules": rules.key,
        "id": rules.id,
        "edition": rules.edition,
        "title": rules.title,
        "editions_named": rules.editions_named,
        "newest": resolve(rules.id) is loaded,
        "digest": loaded.digest,
    }


@router.get("", response_model=RuleSetList, summary="List the rule sets held here")
async def list_rule_sets() -> Response:
    """Give every edition; old ones stay."""
    return Response(json_bytes({"items": [_listed(loaded) for loaded in shipped().values()]}), media_type=JSON)


@router.get("/{rules}", response_model=RuleSetDetail, summary="Read a rule set")
async def get_rule_set(
    rules: Annotated[str, Path(min_length=1, max_length=60, description="id, or id:edition")],
) -> Response:
    """Give one rule set with every value, its unit, clause, source and the day it was last looked at."""
    loaded = resolve(rules)
    if loaded is None:
        raise Refused("not-found", "No such rule set; the list of rule sets names them.")
    body = {**_listed(loaded), "values": loaded.rules.model_dump(mode="json")}
    return Response(json_bytes(body), media_type=JSON)
