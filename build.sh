#!/usr/bin/env bash
# build (default) | run | test | bench: installs what it needs on a fresh Debian machine with Go and Node, then does it.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")"
export CGO_ENABLED=0

say() { printf '%s\n' "$*" >&2; }

modules() {
  if [ ! -d site/node_modules ] || [ site/package-lock.json -nt site/node_modules ]; then
    (cd site && npm ci --no-fund --no-audit --loglevel=error && touch node_modules) >&2
  fi
}

wasm() { GOOS=js GOARCH=wasm go build -trimpath -buildvcs=false -ldflags "-s -w -buildid=" -o "site/build/$1.wasm" "./wasm/$1"; }

build() {
  command -v go >/dev/null || { say "Go is missing: install Go 1.26 or later"; exit 1; }
  command -v node >/dev/null || { say "Node is missing: install Node 20 or later"; exit 1; }
  modules
  mkdir -p site/build
  wasm engine
  wasm stage
  cp "$(go env GOROOT)/lib/wasm/wasm_exec.js" site/build/
  node site/build.mjs
}

case "${1:-build}" in
  build) build ;;
  run) build && exec node site/serve.mjs ;;
  test) exec bash site/test/run.sh ;;
  bench) shift; build && exec node site/bench.mjs "$@" ;;
  *) say "use: ./build.sh [build|run|test|bench]"; exit 2 ;;
esac
