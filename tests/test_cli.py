"""The command, as a new user types it."""

import json
import os
import signal
import socket
import subprocess
import sys
import time
from pathlib import Path

import httpx
import pytest
from sqlalchemy import text

from faultloop.cli import main
from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate

TABLE = (
    "label,nominal_voltage_to_earth_v,role,feeds,rated_current_a,overcurrent_device,residual_current_device,"
    "earth_fault_loop_impedance_ohm,residual_operating_time_ms,rules\n"
    "Good,230,final,socket-outlets,32,B32,30 mA A,0.62,24,bs-7671\n"
    "Held,230,final,socket-outlets,32,B32,30 mA A,OL,24,bs-7671\n"
    "Refused,230,final,socket-outlets,32,B1000,30 mA A,0.62,24,bs-7671\n"
)


@pytest.fixture
def points(tmp_path: Path) -> Path:
    file = tmp_path / "points.csv"
    file.write_text(TABLE, encoding="utf-8")
    return file


def test_assess_prints_a_table_that_reconciles(points: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["assess", str(points), "--default", "earthing=TN-S"]) == 0
    out, err = capsys.readouterr()
    assert "3 rows in = 1 judged (1 pass) + 1 held + 1 refused" in out
    assert "no permission" in out
    assert "earthing = TN-S" in err


def test_assess_without_the_earthing_decides_nothing(points: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["assess", str(points)]) == 0
    assert "1 judged (1 undetermined)" in capsys.readouterr().out


def test_assess_writes_csv(points: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["assess", str(points), "--default", "earthing=TN-S", "--output", "csv"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert len(lines) == 4
    assert "overcurrent_disconnection_verdict" in lines[0]


def test_assess_writes_the_workshop_page(points: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ask = ["assess", str(points), "--default", "earthing=TN-S", "--output", "html"]
    assert main([*ask, "--population", "12"]) == 0
    page = capsys.readouterr().out
    assert page.startswith("<!doctype html>")
    assert "3 rows = 1 judged + 1 held + 1 refused" in page
    assert "of the 12 may fail" in page
    assert main([*ask, "--population", "2"]) == 1
    assert "3 different points" in capsys.readouterr().err


def test_assess_reads_a_decimal_comma_and_passes_over_a_column(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "comma.csv"
    text = (
        TABLE.replace(",", ";").replace("0.62", "0,620").replace("label;", "label;Remarks;").replace("Good;", "Good;;")
    )
    file.write_text(text.splitlines()[0] + "\n" + text.splitlines()[1] + "\n", encoding="utf-8-sig")
    ask = ["assess", str(file), "--default", "earthing=TN-S", "--decimal", "comma"]
    assert main(ask) == 1
    assert "column 2 is not known" in capsys.readouterr().err
    assert main([*ask, "--ignore", "Remarks"]) == 0
    assert "1 rows in = 1 judged (1 pass)" in capsys.readouterr().out


def test_assess_refuses_what_it_cannot_read(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    wrong = tmp_path / "wrong.csv"
    wrong.write_text("lable\nx\n", encoding="utf-8")
    assert main(["assess", str(wrong)]) == 1
    assert "did you mean label" in capsys.readouterr().err
    assert main(["assess", str(tmp_path / "none.csv")]) == 1
    with pytest.raises(SystemExit):
        main(["assess", str(wrong), "--default", "earthing"])


def test_openapi_is_printed(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["openapi"]) == 0
    assert json.loads(capsys.readouterr().out)["info"]["title"] == "faultloop"


def test_migrate_and_refusals(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    url = f"sqlite:///{tmp_path / 'm.sqlite3'}"
    assert main(["migrate", "--database-url", url]) == 0
    engine = open_engine(url)
    with engine.begin() as connection:
        connection.execute(text("UPDATE alembic_version SET version_num = 'ffffffffffff'"))
    engine.dispose()
    assert main(["serve", "--database-url", url]) == 1
    assert "newer version" in capsys.readouterr().err
    assert main(["migrate", "--database-url", "mysql://u:secret@h/d"]) == 1
    assert "secret" not in capsys.readouterr().err


def test_serve_migrates_an_empty_database_and_ends_on_a_signal(tmp_path: Path) -> None:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    url = f"sqlite:///{tmp_path / 's.sqlite3'}"
    command = [sys.executable, "-m", "faultloop.cli", "serve", "--port", str(port), "--database-url", url]
    process = subprocess.Popen(command, env=os.environ)
    try:
        with httpx.Client(base_url=f"http://127.0.0.1:{port}", trust_env=False) as client:
            for _ in range(200):
                try:
                    if client.get("/health/ready").status_code == 200:
                        break
                except httpx.TransportError:
                    time.sleep(0.1)
            where = "/v1/assessments/12345678-1234-4234-8234-123456789abc"
            assert client.put(where, json=EXAMPLE_REQUEST).status_code == 201
            assert client.get(f"{where}/replay").json()["identical"] is True
    finally:
        process.send_signal(signal.SIGTERM)
        assert process.wait(20) in (0, -signal.SIGTERM)
    engine = open_engine(url)
    migrate(engine)
    with engine.connect() as connection:
        assert connection.execute(text("SELECT count(*) FROM assessment")).scalar_one() == 1
    engine.dispose()
