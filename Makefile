# Tasks of the project. "make test" is all a change has to pass on a desk;
# .ci/run adds what takes longer.

GO ?= go
STATICCHECK = honnef.co/go/tools/cmd/staticcheck@v0.8.2

.PHONY: test browser vet static unit bench fuzz walk

test: browser vet static unit

# The report's tests need a headless browser; the system's package manager brings it.
browser:
	@if ! command -v chromium >/dev/null 2>&1 && ! command -v chromium-browser >/dev/null 2>&1 && ! command -v google-chrome >/dev/null 2>&1; then \
		echo "installing a browser for the report's tests"; \
		if [ "$$(id -u)" = 0 ]; then SUDO=; else SUDO=sudo; fi; \
		if command -v apt-get >/dev/null 2>&1; then $$SUDO apt-get update -q && $$SUDO apt-get install -y -q --no-install-recommends chromium fonts-dejavu-core; \
		elif command -v dnf >/dev/null 2>&1; then $$SUDO dnf install -y chromium; \
		elif command -v pacman >/dev/null 2>&1; then $$SUDO pacman -S --noconfirm chromium; \
		elif command -v brew >/dev/null 2>&1; then brew install --cask chromium; \
		else echo "no known package manager: install chromium by hand"; exit 1; fi; \
	fi

vet:
	@test -z "$$(gofmt -l $$(git ls-files '*.go'))" || { echo "gofmt would change:"; gofmt -l $$(git ls-files '*.go'); exit 1; }
	$(GO) vet ./...

static:
	$(GO) run $(STATICCHECK) ./...

unit:
	CI=true $(GO) test -race -timeout 40m ./...

bench:
	$(GO) test -run '^$$' -bench . ./...

fuzz:
	$(GO) test ./scenarios -run '^$$' -fuzz FuzzLoad -fuzztime 1000000x

walk:
	CYCLE_WALK=10000 $(GO) test ./carbon -run RandomWalk -v -timeout 60m
