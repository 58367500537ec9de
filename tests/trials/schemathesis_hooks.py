"""What a schema cannot say: a rule set's name must be a known one, and a caller's set must keep the contract.

Bodies of points are tried with published sets; callers' sets are tried by their own operations.
"""

from typing import Any

import schemathesis
from schemathesis import GenerationMode

PUBLISHED = ("iec-60364", "bs-7671", "as-nzs-3000:2018")


@schemathesis.hook
def before_call(_: Any, case: Any, __: Any) -> None:
    """Judge a generated point by a published set; one that is meant to be refused is left as it is."""
    meant_well = case.meta is None or case.meta.generation.mode is GenerationMode.POSITIVE
    judged = isinstance(case.body, dict) and ("point" in case.body or "supplies" in case.body)
    if meant_well and judged and "rules" in case.body:
        case.body = {**case.body, "rules": PUBLISHED[len(str(case.body["rules"])) % len(PUBLISHED)]}
