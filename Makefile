# All set-up needs Python >= 3.11, make and the package registries; everything is made in .venv.
PYTHON ?= python3
VENV := .venv
BIN := $(VENV)/bin
READY := $(VENV)/.ready

.PHONY: demo test lint unit trials benchmark openapi lock ngspice clean

$(READY): requirements.txt pyproject.toml
	test -x $(BIN)/python || $(PYTHON) -m venv $(VENV)
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --require-hashes -r requirements.txt
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --no-deps --no-build-isolation --editable .
	touch $(READY)

demo: $(READY)
	$(BIN)/python fixtures/workshop/demo.py

test: lint unit

lint: $(READY)
	$(BIN)/ruff check service tests fixtures
	$(BIN)/mypy
	$(BIN)/lint-imports --no-cache
	$(BIN)/hadolint docker/Dockerfile
	$(BIN)/compose-lint check --quiet --no-pager --fail-on medium --strict-config --config docker/compose-lint.yaml \
		docker/compose.yaml

unit: $(READY) ngspice
	$(BIN)/python -m pytest

# The circuit simulator that tests/reference compares with; without it those tests fail and say so.
ngspice:
	@command -v ngspice >/dev/null || [ "$$(id -u)" != 0 ] || ! command -v apt-get >/dev/null || \
		{ apt-get update -qq && apt-get install -y -qq --no-install-recommends ngspice; } >/dev/null 2>&1 || true

trials: $(READY)
	$(BIN)/python -m tests.trials

benchmark: $(READY)
	$(BIN)/python -m tests.benchmarks.http_speed
	$(BIN)/python -m tests.benchmarks.circuits_speed
	$(BIN)/python -m tests.benchmarks.bench_speed

openapi: $(READY)
	$(BIN)/faultloop openapi > openapi/openapi.json

# Needs uv; the file names no registry.
COMPILE := uv pip compile --universal --generate-hashes --no-header --no-annotate --no-emit-index-url --no-emit-find-links

lock:
	$(COMPILE) --python-version 3.11 --extra dev --extra build --output-file requirements.txt pyproject.toml
	$(COMPILE) --python-version 3.11 --extra postgresql --constraint requirements.txt \
		--output-file docker/requirements.txt pyproject.toml

clean:
	rm -rf $(VENV) .hypothesis
