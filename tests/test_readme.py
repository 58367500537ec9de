"""The README's request is answered as the README says."""

import json
import re
from pathlib import Path
from typing import Any
from urllib.parse import parse_qsl

from faultloop import assess, bench_network
from faultloop.digests import json_bytes
from faultloop.exchange.batch_answers import answer
from faultloop.exchange.batches import BatchQuery
from faultloop.exchange.judging import judged
from faultloop.exchange.render import assess_requests
from faultloop.exchange.separated_supplies import SeparatedSupplyRequest, as_assessment
from faultloop.exchange.uploads import Upload, read_upload

README = (Path(__file__).parent.parent / "README.md").read_text(encoding="utf-8")


def _block(name: str) -> dict[str, Any]:
    found = re.search(rf"<!-- {name} -->\n```json\n(.*?)```", README, re.S)
    assert found is not None, f"the README has no block named {name}"
    block: dict[str, Any] = json.loads(found[1])
    return block


def _hold(shown: Any, given: Any, where: str) -> None:
    """What is shown stands in what is given; a shown list item stands somewhere in the given list."""
    if isinstance(shown, dict):
        for key, value in shown.items():
            assert key in given, f"{where}/{key} is not in the answer"
            _hold(value, given[key], f"{where}/{key}")
    elif isinstance(shown, list):
        for at, item in enumerate(shown):
            name = next(iter(item))
            match = [other for other in given if other.get(name) == item[name]]
            assert match, f"{where}/{at} is not in the answer"
            _hold(item, match[0], f"{where}/{at}")
    else:
        assert shown == given, where


def test_the_batch_is_answered_as_shown() -> None:
    found = re.search(r"<!-- batch -->\n```csv\n(.*?)```", README, re.S)
    assert found is not None
    query = re.search(r"/v1/batches\?(\S+)'", README)
    assert query is not None
    defaults = [value for name, value in parse_qsl(query[1]) if name == "default"]
    upload = Upload("csv", found[1].encode(), BatchQuery(default=defaults))
    read = read_upload(upload)
    told = json.loads(json_bytes(answer(judged(read.rows), "x", read.reading, upload.input_digest)))
    _hold(_block("batch answer"), told, "")


def test_the_separated_supply_is_answered_as_shown() -> None:
    asked = as_assessment(SeparatedSupplyRequest.model_validate(_block("separated")))
    _hold(_block("separated answer"), assess_requests([asked])[0], "")


def test_request_is_answered_as_shown() -> None:
    _hold(_block("answer"), assess(_block("request")), "")


def test_the_bench_is_answered_as_shown() -> None:
    _hold(_block("bench answer"), bench_network(_block("bench")), "")


def test_own_rules_are_resolved_and_judged_by_as_said() -> None:
    own = _block("own rules")
    readings = {**_block("request")["readings"], "insulation_resistance_megohm": 1.5}
    for rules, verdict in ((own, "fail"), (own["extends"], "pass")):
        answer = assess({**_block("request"), "readings": readings, "rules": rules})
        finding = next(f for f in answer["findings"] if f["check"] == "insulation-resistance")
        assert finding["verdict"] == verdict
