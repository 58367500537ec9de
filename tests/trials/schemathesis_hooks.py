"""What a schema cannot say: a rule set's name must be a known one, and a caller's set must keep the contract.

Bodies of points are tried with published sets; callers' sets are tried by their own operations.
"""

import json
from typing import Any

import schemathesis
from pydantic import ValidationError

from faultloop.exchange.own_rules import STORED_NAME, OwnRuleSet

PUBLISHED = ("iec-60364", "bs-7671", "as-nzs-3000:2018")


def fits(rules: Any) -> bool:
    """Whether rules fit the schema; what does not is left as it is, because it must be refused."""
    if isinstance(rules, str):
        return len(rules) <= 60 and STORED_NAME.fullmatch(f"{rules.partition(':')[0]}:2026") is not None
    try:
        OwnRuleSet.model_validate_json(json.dumps(rules))
    except ValidationError as error:
        # A unit that belongs to another value is beyond the schema.
        return all(fault["type"] == "value_error" for fault in error.errors())
    except ValueError:
        return False
    return isinstance(rules, dict)


@schemathesis.hook
def map_body(_: Any, body: Any) -> Any:
    """Judge a generated point by a published set where it names or says one that fits the schema."""
    if isinstance(body, dict) and "point" in body and fits(body.get("rules")):
        return {**body, "rules": PUBLISHED[len(str(body["rules"])) % len(PUBLISHED)]}
    return body
