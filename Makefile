# One command to run Siltwatch, one to test it. Everything is installed into .venv from requirements.lock.

PYTHON ?= $(firstword $(foreach name,python3 python3.13 python3.12 python3.11,$(if $(shell $(name) -c 'import sys; sys.exit(sys.version_info < (3, 11))' 2>/dev/null && echo yes),$(name))))
VENV := .venv
STAMP := $(VENV)/.synced
BIN := $(VENV)/bin
UV := uv==0.13.9
SYNC = $(BIN)/uv pip sync --quiet --require-hashes --python $(BIN)/python requirements.lock
# Long enough for Django's own check of it; it signs nothing that is kept.
CHECK_ENV := SILTWATCH_DEBUG= SILTWATCH_PLAIN_HTTP= SILTWATCH_SECRET_KEY=only-for-checks-0123456789-abcdefghijklmnopqrstuvwxyz-ABCDEFGHIJKLM

.PHONY: run test check bench lock install clean

run: $(STAMP) ## serve Siltwatch with its own database and broker; Ctrl-C stops it
	@exec $(BIN)/python -m config.stack run --with-parent

test: $(STAMP) ## every test, on servers of its own
	@exec $(BIN)/python -m pytest -m "not bench" $(ARGS)

bench: $(STAMP) ## the measurements
	@exec $(BIN)/python -m pytest -m bench -s $(ARGS)

check: $(STAMP) ## style, types, migrations, layers, production settings
	$(BIN)/ruff check .
	$(BIN)/ruff format --check .
	$(CHECK_ENV) $(BIN)/mypy config fleet samples alerts tests
	$(BIN)/python -m config.stack exec -- $(BIN)/python manage.py makemigrations --check --dry-run
	$(CHECK_ENV) $(BIN)/python manage.py check --deploy --fail-level WARNING
	$(BIN)/python -m pytest -q tests/test_layers.py

install: $(STAMP)

# Made again when the lock changes, or when an installation broke off half-way.
$(STAMP): requirements.lock
	@test -n "$(PYTHON)" || { echo "Siltwatch needs Python 3.11 or newer, and none is on the PATH: install one, or say make PYTHON=/path/to/python3." >&2; exit 1; }
	@$(PYTHON) -c 'import ensurepip, venv' 2>/dev/null || { echo "$(PYTHON) cannot make virtual environments: install its venv package (on Debian: apt-get install python3-venv)." >&2; exit 1; }
	@test -x $(BIN)/python || { echo "Making $(VENV) with $(PYTHON) …"; $(PYTHON) -m venv $(VENV); }
	@test -x $(BIN)/uv || $(BIN)/python -m pip install --quiet --disable-pip-version-check $(UV)
	@echo "Installing the packages of requirements.lock …"
	@$(SYNC) || { echo "Trying again with the certificates of this system …"; $(SYNC) --system-certs; }
	@touch $@

lock: $(STAMP) ## choose the newest versions that pyproject.toml allows, and write them down with their hashes
	$(BIN)/uv pip compile pyproject.toml --group embedded --group dev --universal --generate-hashes --upgrade --no-header --no-annotate --quiet -o requirements.lock

clean: ## remove what was installed or generated; the data in .run stay
	rm -rf $(VENV) .mypy_cache .ruff_cache .pytest_cache .hypothesis
	find . -name __pycache__ -type d -prune -exec rm -rf {} +
