# The steps of .ci/run by name. buf and the linter live in modules of their
# own, so that they do not weigh on the service's.
BUF  := go tool -modfile=proto/tools/buf/go.mod buf
LINT := go tool -modfile=.ci/lint/go.mod golangci-lint
# ./... passes over folders named testdata, which hold one small package.
PACKAGES := ./... ./testdata/demo

.PHONY: all format-check vet lint proto-lint proto-breaking generate generated-check test race points fuzz bench readme

all: format-check vet lint proto-lint proto-breaking generated-check test

format-check:
	@bad=$$(git ls-files '*.go' | xargs gofmt -l); if [ -n "$$bad" ]; then echo "gofmt would change: $$bad"; exit 1; fi
	$(BUF) format -d --exit-code --path proto/calandria

vet:
	go vet $(PACKAGES)

lint:
	$(LINT) run

proto-lint:
	$(BUF) lint

proto-breaking:
	@mkdir -p .cache
	$(BUF) build --path proto/calandria -o .cache/now.binpb
	$(BUF) breaking .cache/now.binpb --against proto/baseline/calandria.binpb

generate:
	go run ./proto/tools/vendorprotos
	$(BUF) generate
	go generate ./...
	go mod tidy

generated-check: generate
	git diff --exit-code
	@new=$$(git ls-files --others --exclude-standard); if [ -n "$$new" ]; then echo "generated and not kept: $$new"; exit 1; fi

test:
	go test $(PACKAGES)

race:
	go test -race $(PACKAGES)

# A million random states of steam a region, by every pair, without the race
# detector, which would take ten times as long.
points:
	go test ./engine/steam -run RoundTrips -v -points 1000000 -timeout 20m

# 120 s in all, shared by every fuzz target; minimising would eat the time.
fuzz:
	.ci/fuzz 120

bench:
	go test -run '^$$' -bench . ./engine/...

# The README's two commands, as a newcomer runs them.
readme:
	.ci/newcomer
