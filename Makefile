# make demo   set up what the program needs, compare an example, say where its report is
# make check  set up what the tests need, then everything; what .ci/run calls
#
# Parts of check: lint modules build race fuzz bench-once reference.

GO       ?= go
NPM      ?= npm
PYTHON   ?= /usr/bin/python3
FUZZTIME ?= 40s

STATICCHECK := bin/staticcheck
RUNTIME     := charts/runtime/echarts.min.js
SUMMARY     := bin/test-summary

.DEFAULT_GOAL := build
.NOTPARALLEL:
.PHONY: demo check tools runtime build test race fuzz bench bench-once speed lint fmt-check modules reference clean

demo: runtime build
	bin/steadytick compare testdata/loops/winch-drum.yaml --html report.html
	@echo
	@echo "report: $(CURDIR)/report.html"

check: tools runtime lint modules build race fuzz bench-once reference
	@echo
	@cat $(SUMMARY)

# What the tests need from the distribution: a browser, a C compiler for the race detector, Python libraries.
tools:
	scripts/install-check-tools.sh

# The chart runtime that the reports carry; taken in by go:embed.
runtime: $(RUNTIME)

$(RUNTIME): charts/runtime/package.json charts/runtime/package-lock.json
	@command -v $(NPM) >/dev/null 2>&1 || scripts/install-check-tools.sh npm
	cd charts/runtime && $(NPM) ci --ignore-scripts --no-audit --no-fund --loglevel=error
	cp charts/runtime/node_modules/echarts/dist/echarts.min.js $@

build:
	$(GO) build -o bin/steadytick ./cmd/steadytick

test:
	$(GO) test ./...

# STEADYTICK_CHECK: a test that lacks its tool fails instead of being skipped; the gate
# fails on any skip. -count=1: a result from the cache may be older than the tools it needs.
race: $(RUNTIME)
	@mkdir -p bin
	$(GO) build -o bin/testgate ./internal/tools/testgate
	set -o pipefail; STEADYTICK_CHECK=1 $(GO) test -race -count=1 -json -timeout 12m ./... | bin/testgate -summary $(SUMMARY)

race: SHELL := /bin/bash

# Every fuzz function of every package, FUZZTIME each.
fuzz:
	GO="$(GO)" scripts/fuzz.sh $(FUZZTIME)

bench:
	$(GO) test -run '^$$' -bench . -benchmem ./...

# The sweep of rate against the same work in NumPy and SciPy.
speed: tools
	GO="$(GO)" PYTHON="$(PYTHON)" scripts/speed.sh

# Benchmarks compile and run.
bench-once:
	$(GO) test -run '^$$' -bench . -benchtime 1x ./...

lint: fmt-check $(STATICCHECK)
	$(GO) vet ./...
	$(STATICCHECK) ./...

fmt-check:
	@files=$$(gofmt -l $$(find . -name '*.go' -not -path '*/node_modules/*')); \
	if [ -n "$$files" ]; then echo "gofmt would change:"; echo "$$files"; exit 1; fi

# The checker has a module of its own, so that the program's go.mod names only what the program uses.
$(STATICCHECK): tools/go.mod tools/go.sum
	$(GO) build -C tools -o ../$@ honnef.co/go/tools/cmd/staticcheck

modules:
	$(GO) mod tidy -diff
	$(GO) mod verify

# The reference figures: known values, and a sample derived afresh.
reference:
	$(PYTHON) testdata/reference/generate.py --check
	$(PYTHON) testdata/reference/antiwindup.py --check
	$(PYTHON) testdata/reference/friction.py --check
	$(PYTHON) testdata/reference/quantized.py --check
	$(PYTHON) testdata/reference/backlash.py --check

clean:
	rm -rf bin report.html charts/runtime/node_modules $(RUNTIME)
