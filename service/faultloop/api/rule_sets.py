"""/v1/rule-sets: the rule sets held here with every value and source, and callers' own: tried, stored, read."""

import json
from typing import Annotated, Any

from fastapi import APIRouter, Header, Path, Query, Request, Response
from fastapi.exceptions import RequestValidationError
from starlette.convertors import Convertor, register_url_convertor

from faultloop.api.bodies import OWN_RULES_BODY, read_rule_set
from faultloop.api.problems import Refused
from faultloop.digests import json_bytes, sha256
from faultloop.exchange.own_rules import CAUTION, STORED_NAME, differences
from faultloop.exchange.resources import RuleSetDetail, RuleSetList, RuleSetListQuery, RuleSetValidation
from faultloop.records.rule_sets import content_named, contents
from faultloop.rules.loader import content, resolve, shipped


class RuleSetConvertor(Convertor[str]):
    """A rule set in an address; `validate` is none."""

    regex = "(?!validate$)[^/]+"

    def convert(self, value: str) -> str:
        """The name as it stands."""
        return value

    def to_string(self, value: str) -> str:
        """The same the other way."""
        return value


register_url_convertor("ruleset", RuleSetConvertor())
router = APIRouter(prefix="/v1/rule-sets", tags=["rule sets"])
JSON = "application/json"
Name = Annotated[str, Path(min_length=1, max_length=60, description="id, or id:edition")]


def _listed(content: bytes) -> dict[str, Any]:
    """One set as its content tells, whichever version of the service it was written for."""
    told, digest = json.loads(content), sha256(content)
    newest = resolve(told["id"])
    return {
        "rules": f"{told['id']}:{told['edition']}",
        **{name: told[name] for name in ("id", "edition", "title", "editions_named")},
        "newest": newest is not None and newest.digest == digest,
        "published": CAUTION not in told["cautions"],
        "digest": digest,
    }


def _detail(content: bytes, status: int = 200) -> Response:
    body = {**_listed(content), "values": json.loads(content)}
    headers = {"ETag": f'"{body["digest"]}"', "Location": f"/v1/rule-sets/{body['rules']}"}
    return Response(json_bytes(body), status, media_type=JSON, headers=headers)


@router.get("", response_model=RuleSetList, summary="List the rule sets held here")
def list_rule_sets(query: Annotated[RuleSetListQuery, Query()], request: Request) -> Response:
    """Give every published edition (old ones stay), then callers' own sets page by page; `next` leads on."""
    own = contents(request.app.state.engine, after=query.cursor or "", size=query.page_size + 1)
    published = [] if query.cursor else [content(loaded) for loaded in shipped().values()]
    body: dict[str, Any] = {"items": [_listed(told) for told in [*published, *own[: query.page_size]]]}
    if len(own) > query.page_size:
        last = body["items"][-1]["rules"]
        body["next"] = str(request.url.include_query_params(page_size=query.page_size, cursor=last))
    return Response(json_bytes(body), media_type=JSON, headers={"Cache-Control": "no-store"})


@router.post(
    "/validate",
    response_model=RuleSetValidation,
    openapi_extra=OWN_RULES_BODY,
    summary="Try a rule set of your own; store nothing",
)
async def validate_rule_set(request: Request) -> Response:
    """Resolve a set over the one that it extends, hold it to the contract, and say what differs."""
    loaded, base = await read_rule_set(request)
    body: dict[str, Any] = {"valid": True, "rules": loaded.rules.key}
    body |= {name: getattr(loaded.rules, name) for name in ("id", "edition", "title")}
    if base is not None:
        body["extends"] = base.rules.key
    body |= {"digest": loaded.digest, "values": loaded.rules.model_dump(mode="json")}
    body["differences"] = [] if base is None else differences(base, loaded)
    return Response(json_bytes(body), media_type=JSON, headers={"Cache-Control": "no-store"})


@router.put(
    "/{rules:ruleset}",
    response_model=RuleSetDetail,
    openapi_extra=OWN_RULES_BODY,
    summary="Store a rule set of your own under its id:edition",
    responses={201: {"model": RuleSetDetail, "description": "Stored"}},
)
async def put_rule_set(
    rules: Name,
    request: Request,
    if_none_match: Annotated[str | None, Header(max_length=200, description="* asks for a new one only")] = None,
) -> Response:
    """Store a set for good; the same content again answers what is stored, another is refused."""
    loaded, _ = await read_rule_set(request)
    if loaded.rules.key != rules:
        fault = {"loc": ("body", "id"), "type": "rule_set", "msg": "the address must be this id:edition", "ctx": {}}
        raise RequestValidationError([fault], body={"id": ""})
    digest, created = await request.app.state.own_rules.store(loaded)
    if digest != loaded.digest:
        kind = "conflict" if if_none_match is None else "precondition-failed"
        raise Refused(kind, "A stored rule set is not changed: give another content another edition.")
    return _detail(content(loaded), 201 if created else 200)


@router.get("/{rules:ruleset}", response_model=RuleSetDetail, summary="Read a rule set")
def get_rule_set(rules: Name, request: Request) -> Response:
    """Give one rule set with every value, its unit, clause, source and the day it was last looked at."""
    loaded = resolve(rules)
    told = content(loaded) if loaded else None
    if told is None and STORED_NAME.fullmatch(rules):
        told = content_named(request.app.state.engine, rules)
    if told is None:
        raise Refused("not-found", "No such rule set; the list of rule sets names them.")
    return _detail(told)
