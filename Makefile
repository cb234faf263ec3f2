# steelyard: build, try, test. "make" or "make help" lists the targets.
SHELL := /bin/bash -o pipefail
export GOFLAGS := -buildvcs=false

VERSION := $(shell git describe --tags --always --dirty 2>/dev/null || echo unreleased)
FUZZCOUNT ?= 20000x

.DEFAULT_GOAL := help
.PHONY: help build engine demo test race office script browser soak check fuzz bench bench-peers golden dist clean

ENGINE := forest/whatif/built/engine.txt
ENGINE_SOURCES := go.mod $(shell find cmd/engine forest/layout forest/words forest/webpage ingest/rules meta -name '*.go' ! -name '*_test.go')

help: ## list the targets
	@awk -F ':.*## ' '/^[a-z-]+:.*## / { printf "  make %-11s %s\n", $$1, $$2 }' $(MAKEFILE_LIST)

build: engine ## build ./steelyard with the engine for report pages
	@go build -trimpath -ldflags "-s -w -X main.version=$(VERSION)" -o steelyard ./cmd/steelyard

engine: ## build the engine that recomputes report pages, if its sources changed (needs xz)
	@if command -v xz >/dev/null; then $(MAKE) --no-print-directory $(ENGINE); \
	else rm -f $(ENGINE); echo "xz was not found: building without the engine, so that report pages only show the analysis as planned (Debian: apt-get install xz-utils)"; fi

$(ENGINE): $(ENGINE_SOURCES)
	@go run ./cmd/engine/pack >/dev/null

demo: build ## pool the published BCG trials and an invented workbook; charts and a report page go to out/
	@mkdir -p out
	./steelyard pool testdata/checks/bcg_counts.csv
	./steelyard pool testdata/demo.xlsx
	./steelyard chart forest testdata/checks/bcg_counts.csv --out out/bcg.svg --overwrite
	./steelyard chart forest testdata/demo.xlsx --outcome "flare within 24 weeks" --out out/flare.png --overwrite
	./steelyard report testdata/demo.xlsx --out out/demo --overwrite

test: ## run every test
	go test ./...

race: ## run every test under the race detector
	go test -race ./...

office: ## what needs LibreOffice Calc: the template keeps its numbers in another program, the audit workbook is computed anew by it
	go test -tags office -run Office ./ingest ./cmd/steelyard

script: ## the script of the report page: its tests by node, its types by TypeScript (needs node and npm)
	node --test forest/whatif/script/test/*.test.js
	@folder="$$(mktemp -d)"; trap 'rm -rf "$$folder"' EXIT; \
	if npm install --silent --no-audit --no-fund --prefix "$$folder" typescript@5 >/dev/null 2>&1; then "$$folder/node_modules/.bin/tsc" -p forest/whatif/script; \
	else echo "TypeScript could not be fetched: types are not checked"; fi

browser: engine ## the report in a real browser: widths, sliders, filter, print, accessibility (needs Chromium; axe-core by npm where there is a network)
	@folder="$$(mktemp -d)"; trap 'rm -rf "$$folder"' EXIT; \
	if npm install --silent --no-audit --no-fund --prefix "$$folder" axe-core@4.10.3 >/dev/null 2>&1; then export STEELYARD_AXE="$$folder/node_modules/axe-core/axe.min.js"; \
	else echo "axe-core could not be fetched: the tests' own checks of accessibility stand alone"; fi; \
	go test -tags browser -count=1 -run Browser ./cmd/steelyard

soak: ## hostile files, 10,000 damaged workbooks; a living review killed throughout 500 updates
	go test -tags soak -run 'WorstCases|TenThousand' -v ./ingest
	STEELYARD_LEDGER_UPDATES=500 go test -count=1 -run Killed -v ./ingest/ledger

check: ## formatting, vet, tidiness, static analysis, imports
	@unformatted="$$(gofmt -l .)"; if [ -n "$$unformatted" ]; then echo "gofmt would change: $$unformatted"; exit 1; fi
	go vet ./... ./testdata/demo ./testdata/peers
	GOOS=windows go vet ./...
	go vet -tags office,soak ./ingest ./cmd/steelyard
	go vet -tags browser ./cmd/steelyard
	GOOS=js GOARCH=wasm go vet ./cmd/engine ./forest/webpage ./meta/letters
	go mod tidy -diff
	go tool staticcheck ./...
	go test -count=1 -run TestRooms ./cmd/steelyard

fuzz: ## every fuzz target for FUZZCOUNT inputs each (default 20000x)
	@set -e; for package in $$(go list ./...); do \
	  for target in $$(go test -list '^Fuzz' $$package | grep '^Fuzz' || true); do \
	    echo "$$package $$target"; \
	    go test -run '^$$' -fuzz "^$$target$$" -fuzztime $(FUZZCOUNT) $$package; \
	  done; \
	done

bench: ## every benchmark, in the form that benchstat reads
	go test -run '^$$' -bench . -benchmem ./...

bench-peers: ## the same work here and in general-purpose peers (numpy, scipy, awk), in one run: a table of ratios
	go run ./testdata/peers

golden: ## rewrite the golden files and the README's transcript and figures, to be looked at before they are committed
	go test ./... -run 'Golden|Readme' -update

dist: engine ## cross-build for Linux, Windows and macOS into dist/
	@set -e; mkdir -p dist; for target in linux/amd64 linux/arm64 windows/amd64 darwin/arm64 darwin/amd64; do \
	  suffix=; case $$target in windows/*) suffix=.exe;; esac; \
	  echo "dist/steelyard-$${target/\//-}$$suffix"; \
	  CGO_ENABLED=0 GOOS=$${target%/*} GOARCH=$${target#*/} go build -trimpath -ldflags "-s -w -X main.version=$(VERSION)" -o dist/steelyard-$${target/\//-}$$suffix ./cmd/steelyard; \
	done

clean: ## remove what the targets above made
	rm -rf steelyard steelyard.exe out dist $(ENGINE) forest/whatif/built/wasm_exec.js
