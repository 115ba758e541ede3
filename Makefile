# Tasks of the project. "make test" is all a change has to pass on a desk;
# .ci/run adds what takes longer.

GO ?= go
STATICCHECK = honnef.co/go/tools/cmd/staticcheck@v0.8.2

.PHONY: test browser firefox vet static unit bench fuzz walk

test: browser vet static unit

# The reports' tests need a headless browser, which the system's package manager
# brings, and axe-core (MPL-2.0), which npm brings; it is used, not shipped.
AXE = axe-core@4.14.1
PUPPETEER = puppeteer-core@24.43.1
NPM_DIR = reports/.npm
npm_install = npm install --prefix $(NPM_DIR) --no-save --no-package-lock --ignore-scripts --no-audit --no-fund --silent

# Installs packages by the manager that is there: their names for apt, then for others.
define system_install
	echo "installing for the reports' tests: $(1)"; \
	if [ "$$(id -u)" = 0 ]; then SUDO=; else SUDO=sudo; fi; \
	if command -v apt-get >/dev/null 2>&1; then $$SUDO apt-get update -q && $$SUDO apt-get install -y -q --no-install-recommends $(1); \
	elif command -v dnf >/dev/null 2>&1; then $$SUDO dnf install -y $(2); \
	elif command -v pacman >/dev/null 2>&1; then $$SUDO pacman -S --noconfirm $(2); \
	elif command -v brew >/dev/null 2>&1; then brew install --cask $(2); \
	else echo "no known package manager: install $(2) by hand"; exit 1; fi
endef

browser:
	@if ! command -v chromium >/dev/null 2>&1 && ! command -v chromium-browser >/dev/null 2>&1 && ! command -v google-chrome >/dev/null 2>&1; then \
		$(call system_install,chromium fonts-dejavu-core,chromium); \
	fi
	@grep -qs '"version": "$(lastword $(subst @, ,$(AXE)))"' $(NPM_DIR)/node_modules/axe-core/package.json || $(npm_install) $(AXE) $(PUPPETEER)

# A second engine reads every kind of report: Firefox, driven by puppeteer-core.
firefox: browser
	@if ! command -v firefox-esr >/dev/null 2>&1 && ! command -v firefox >/dev/null 2>&1; then \
		$(call system_install,firefox-esr,firefox); \
	fi
	@grep -qs '"version": "$(lastword $(subst @, ,$(PUPPETEER)))"' $(NPM_DIR)/node_modules/puppeteer-core/package.json || $(npm_install) $(AXE) $(PUPPETEER)
	CI=true CYCLE_FIREFOX=1 $(GO) test ./reports -run Firefox -timeout 40m

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
