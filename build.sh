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

# need COMMAND PACKAGE...: Debian packages for what is not there.
need() {
  local missing=()
  while [ $# -gt 0 ]; do
    bash -c "$1" >/dev/null 2>&1 || missing+=("$2")
    shift 2
  done
  [ ${#missing[@]} -eq 0 ] && return
  say "installing ${missing[*]}"
  { apt-get update -qq && DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "${missing[@]}" fonts-liberation; } >/dev/null
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
  test)
    graphs="python3 -c 'import networkx, igraph' || /usr/bin/python3 -c 'import networkx, igraph'"
    need "command -v chromium" chromium "command -v gpg" gnupg "command -v pdftotext" poppler-utils "ls /usr/share/keyrings/debian-keyring.gpg" debian-keyring "python3 -c 'import mpmath' || /usr/bin/python3 -c 'import mpmath'" python3-mpmath "command -v qemu-aarch64" qemu-user \
      "$graphs" python3-networkx "$graphs" python3-igraph
    exec bash site/test/run.sh
    ;;
  bench)
    shift
    need "command -v chromium" chromium "python3 -c 'import scipy' || /usr/bin/python3 -c 'import scipy'" python3-scipy "python3 -c 'import igraph' || /usr/bin/python3 -c 'import igraph'" python3-igraph "command -v cc" gcc
    build && exec node site/bench.mjs "$@"
    ;;
  *) say "use: ./build.sh [build|run|test|bench]"; exit 2 ;;
esac
