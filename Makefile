# standoff: `make demo` does the main job on the virtual bench, `make test` runs
# every test. Both install what they need where they may, and say so.

SHELL := /bin/bash
GO ?= go

# What the build needs for sound cards, and what the tests need besides.
BUILD_DEBS := gcc libc6-dev pkg-config portaudio19-dev
TEST_DEBS  := jackd2 jconvolver sox poppler-utils python3-scipy

.PHONY: demo test quick lint race bench study build build-deps test-deps clean

# ---- set-up -------------------------------------------------------------------

# $(call install,PACKAGES): installs Debian packages that are missing, as root or
# through sudo where that asks for no password; never fails.
define install
missing=""; \
if command -v dpkg-query >/dev/null; then \
  for p in $(1); do dpkg-query -W -f='$${Status}' $$p 2>/dev/null | grep -q 'ok installed' || missing="$$missing $$p"; done; \
else missing=" $(1)"; fi; \
if [ -n "$$missing" ]; then \
  if ! command -v apt-get >/dev/null; then echo "make: without apt-get, please install yourself:$$missing"; \
  else \
    become=""; [ "$$(id -u)" = 0 ] || become="sudo -n"; \
    if [ "$$(id -u)" = 0 ] || sudo -n true 2>/dev/null; then \
      echo "make: installing$$missing"; \
      { $$become env DEBIAN_FRONTEND=noninteractive apt-get update -q && \
        $$become env DEBIAN_FRONTEND=noninteractive apt-get install -qy --no-install-recommends $$missing; } >.apt.log 2>&1 \
        && rm -f .apt.log || { tail -n 5 .apt.log; echo "make: could not install$$missing (the whole story is in .apt.log)"; }; \
    else echo "make: may not install packages here; as root: apt-get install$$missing"; fi; \
  fi; \
fi
endef

# Sound cards need cgo and PortAudio; everything else does without.
audio_ok := { command -v gcc && pkg-config --exists portaudio-2.0; } >/dev/null 2>&1
tags = $$($(audio_ok) || echo noaudio)
say_tags = $(audio_ok) || echo "make: no PortAudio here: building without audio (-tags noaudio); virtual bench and import work all the same"

build-deps:
	@$(call install,$(BUILD_DEBS))

test-deps:
	@$(call install,$(BUILD_DEBS) $(TEST_DEBS))

# ---- the job ------------------------------------------------------------------

build: build-deps
	@$(say_tags)
	$(GO) build -trimpath -tags "$(tags)" -o bin/standoff ./cmd/standoff

demo: build
	./bin/standoff demo --into demo

# ---- checks -------------------------------------------------------------------

test: test-deps
	@$(say_tags)
	$(GO) test -tags "$(tags)" -count=1 -timeout 10m ./...

# The inner loop: no audio server, no long simulations.
quick:
	$(GO) test -tags "$(tags)" -short -timeout 2m ./...

lint: build-deps
	@bad=$$(gofmt -l cmd configs measure fit report); [ -z "$$bad" ] || { echo "not gofmt'ed: $$bad"; exit 1; }
	$(GO) mod verify >/dev/null
	$(GO) vet -tags "$(tags)" ./...
	$(GO) vet -tags noaudio ./...
	$(GO) test -tags noaudio -count=1 -run 'TestImportLaws' ./cmd/standoff
	GOOS=windows CGO_ENABLED=0 $(GO) build -tags noaudio -o /dev/null ./cmd/standoff
	GOOS=darwin CGO_ENABLED=0 $(GO) build -tags noaudio -o /dev/null ./cmd/standoff
	GOOS=windows CGO_ENABLED=0 $(GO) vet -tags noaudio ./measure/... ./cmd/...

# The binding of PortAudio trips the race detector by itself: without audio.
race:
	$(GO) test -race -tags noaudio -short -timeout 10m ./...

bench: test-deps
	$(GO) test -tags "$(tags)" -run '^$$' -bench . -benchtime 1x ./...

# Writes the tables of fit/STUDY.md anew; takes half an hour.
study: test-deps
	testdata/study.sh -tags "$(tags)"

clean:
	rm -rf bin demo .apt.log
