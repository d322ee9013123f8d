PYTHON ?= python3
VENV   ?= .venv
BIN    := $(VENV)/bin
OUT    ?= out

.PHONY: demo test lint bench pictures view3d clean

demo: $(VENV)/.run
	@for wing in examples/*.toml; do \
		name=$$(basename $$wing .toml); \
		echo; echo "== $$wing"; \
		$(BIN)/wrywing check $$wing && \
		$(BIN)/wrywing templates $$wing --out $(OUT)/$$name --hand right,left && \
		$(BIN)/wrywing report $$wing --out $(OUT)/$$name.html || exit $$?; \
	done
	@echo; echo "Reports and templates are in $(OUT)/: open the HTML pages to look, the PDFs to print, the DXFs for a router."

test: $(VENV)/.dev
	$(BIN)/python -m pytest -n 2

lint: $(VENV)/.dev
	$(BIN)/ruff check .
	$(BIN)/ruff format --check .
	@# mypy does not follow an editable install into the repository's root: it is shown a plain copy.
	rm -rf build
	$(BIN)/pip install -q --no-deps --target build/typed .
	cd build && MYPYPATH=typed ../$(BIN)/mypy --config-file ../pyproject.toml -p wrywing

bench: $(VENV)/.dev
	@for script in tests/bench/bench_*.py; do echo "== $$script"; $(BIN)/python $$script || exit $$?; done

# Renews what README and DEVELOPERS.md take from the program: pictures, keys, modules.
pictures: $(VENV)/.dev
	$(BIN)/python tools/readme.py

# Bundles the part of three.js that the report needs, at the versions in tools/view3d/package.json; asks for npm.
view3d:
	cd tools/view3d && npm ci --no-audit --no-fund && npm run build

$(VENV)/bin/python:
	$(PYTHON) -m venv $(VENV)

$(VENV)/.run: pyproject.toml | $(VENV)/bin/python
	$(BIN)/python -m pip install -q -e .
	touch $@

$(VENV)/.dev: pyproject.toml | $(VENV)/bin/python
	$(BIN)/python -m pip install -q -e ".[dev]"
	touch $@ $(VENV)/.run

clean:
	rm -rf build $(OUT) $(VENV) *.egg-info
