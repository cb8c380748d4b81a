# All set-up is done here: a fresh machine needs only Python 3.11 or newer, and make.
PYTHON ?= python3
VENV := .venv
BIN := $(VENV)/bin
.PHONY: demo test lint types layers unit speed score soak clean

$(VENV)/made: pyproject.toml
	@$(PYTHON) -c 'import sys; sys.exit(sys.version_info < (3, 11))' || { echo "footcal needs Python 3.11 or newer: call 'make PYTHON=python3.11 ...'" >&2; exit 2; }
	test -x $(BIN)/python || $(PYTHON) -m venv $(VENV)
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --editable .
	touch $@

$(VENV)/made-test: $(VENV)/made
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --editable '.[test]'
	touch $@

demo: $(VENV)/made            ## run the main job once on invented data; the report lies in demo/
	$(BIN)/footcal demo --out demo

test: lint types layers unit  ## everything CI runs

lint: $(VENV)/made-test
	$(BIN)/ruff format --check .
	$(BIN)/ruff check .

types: $(VENV)/made-test
	$(BIN)/mypy

layers: $(VENV)/made-test
	$(BIN)/lint-imports

unit: $(VENV)/made-test
	$(BIN)/python -m pytest -n 2 --dist loadscope

speed: $(VENV)/made-test      ## speed as ratios against a peer in the same run
	$(BIN)/python -m tests.speed

score: $(VENV)/made-test      ## accuracy on fresh seeds (SEED=n to repeat a run)
	$(BIN)/python -m tests.score $(if $(SEED),--seed $(SEED))

soak: $(VENV)/made-test       ## long fault runs
	$(BIN)/python -m tests.soak

clean:
	rm -rf $(VENV) build dist demo .pytest_cache .mypy_cache .ruff_cache .hypothesis .import_linter_cache
