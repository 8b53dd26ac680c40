# Each target sets up what it needs. Recipes call the same commands that a person would.
.DEFAULT_GOAL := help
SHELL := /bin/sh
BIN := .venv/bin
DEMO_DIR ?= demo-site
LOCK_FLAGS ?=

.PHONY: help setup demo test bench rates golden lock fresh clean

help: ## list the targets
	@awk -F ':.*## ' '/^[a-z]+:.*## / { printf "make %-7s %s\n", $$1, $$2 }' $(MAKEFILE_LIST)

setup: ## make .venv from the lock file and see to the system libraries
	@.ci/setup test

demo: ## make demo-site and show in it what the program does
	@.ci/setup demo
	$(BIN)/qcreport demo $(DEMO_DIR)

test: setup ## format, lint, types, layers, then all tests
	$(BIN)/ruff format --check .
	$(BIN)/ruff check .
	$(BIN)/mypy
	$(BIN)/lint-imports
	$(BIN)/python -m pytest -n 2

bench: setup ## measure accuracy, speed and memory; fails where a goal is missed
	@code=0; for file in tests/benchmarks/*_bench.py; do $(BIN)/python $$file || code=1; done; exit $$code

rates: setup ## simulate the published error rates anew: docs/rates.csv, docs/rates.svg (can be interrupted)
	OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1 $(BIN)/python tests/rates/rates_run.py --jobs 2

golden: ## renew the golden files and the pages in docs/; read the differences before committing them
	GOLDEN=renew $(BIN)/python -m pytest -q tests/unit/report/test_golden.py
	$(BIN)/python tests/docs_pages.py

lock: ## renew requirements.lock after a change of pyproject.toml (newer releases: LOCK_FLAGS=--upgrade); needs uv
	@command -v uv >/dev/null || { echo "make lock needs uv: python3 -m pip install uv" >&2; exit 1; }
	uv pip compile --quiet --universal --python-version 3.11 --fork-strategy fewest --generate-hashes \
		--no-emit-index-url --custom-compile-command "make lock" --group dev --group build $(LOCK_FLAGS) \
		pyproject.toml --output-file requirements.lock

fresh: ## prove make demo and make test in a bare Debian root (needs root and mmdebstrap; 10 minutes and more)
	@tests/fresh/run

clean: ## remove what the targets made: .venv, caches, demo-site
	rm -rf .venv build dist demo-site .pytest_cache .mypy_cache .ruff_cache .hypothesis .import_linter_cache .coverage
	find . -name __pycache__ -type d -prune -exec rm -rf {} +
