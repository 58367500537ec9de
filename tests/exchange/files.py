"""Files of points judged, for tests."""

import csv
import io
from typing import Any

from faultloop.exchange.batches import BatchQuery
from faultloop.exchange.judging import Judged, judged
from faultloop.exchange.uploads import Upload, read_upload

HEAD = (
    "point_id,label,earthing,nominal_voltage_to_earth_v,role,feeds,rated_current_a,overcurrent_device,"
    "residual_current_device,earth_fault_loop_impedance_ohm,external_earth_fault_loop_impedance_ohm,"
    "residual_operating_time_ms,rules\n"
)
GOOD = "S1,Bench,TN-C-S,230,final,socket-outlets,32,B32,30 mA A,0.62,0.2,24,bs-7671\n"


def judge(text: str | bytes, **query: Any) -> Judged:
    """Read and judge a CSV file."""
    content = text if isinstance(text, bytes) else text.encode()
    return judged(read_upload(Upload("csv", content, BatchQuery(**query))).rows)


def statuses(batch: Judged) -> list[str]:
    """What became of each row."""
    return [batch.rows.of(at).status for at in range(len(batch.found))]


def written(header: list[str], rows: list[list[str]], separator: str = ",") -> str:
    """Rows as a CSV file."""
    out = io.StringIO()
    csv.writer(out, delimiter=separator).writerows([header, *rows])
    return out.getvalue()
