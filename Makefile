# The targets of this project; `make` alone lists them. Each sets up what it needs in .venv first.
PYTHON ?= $(or $(shell for p in python3 python3.13 python3.12 python3.11; do \
  $$p -c 'import sys; sys.exit(sys.version_info < (3, 11))' 2>/dev/null && { echo $$p; break; }; done),python3)
VENV := .venv
BIN := $(VENV)/bin
READY := $(VENV)/ready
JOBS ?= 2

.DEFAULT_GOAL := help
.PHONY: help demo test lint bench prove clean

help: ## list the targets
	@grep -E '^[a-z]+:.*##' $(MAKEFILE_LIST) | sed -E 's/:.*## /\t/' | awk -F'\t' '{printf "  make %-8s %s\n", $$1, $$2}'

$(READY): pyproject.toml
	@$(PYTHON) -c 'import sys; sys.version_info < (3, 11) and sys.exit("Python 3.11 or later is needed, this is " + sys.version.split()[0])'
	$(PYTHON) -m venv $(VENV)
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --upgrade pip
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --editable '.[test,lint]'
	@touch $(READY)

demo: $(READY) ## map the photographs in demo_images/ and write demo_out/
	$(BIN)/sheenmap demo

test: $(READY) ## run all tests
	$(BIN)/python -m pytest -n $(JOBS)

lint: $(READY) ## style, types, the import contract
	$(BIN)/ruff check src tests benchmarks demo_images calibration docs
	$(BIN)/ruff format --check src tests benchmarks demo_images calibration docs
	$(BIN)/mypy
	$(BIN)/lint-imports

bench: $(READY) ## measure speed and memory as ratios, into benchmarks/RESULTS.md
	$(BIN)/python benchmarks/run.py

prove: $(READY) ## map and score the proving scenes, where they are beside the checkout
	$(BIN)/python benchmarks/prove.py

clean: ## remove what make has made
	rm -rf $(VENV) demo_out proving_out build dist .pytest_cache .mypy_cache .ruff_cache .hypothesis .import_linter_cache
