#!/usr/bin/env bash
# All tests: Go, then the page's units, then the built page in a browser. Ends with a line "N passed, N failed".
set -uo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/../.."
export ROOT=$PWD CGO_ENABLED=0
log=$(mktemp -d)
trap 'rm -rf "$log"' EXIT

export PREPONDER_REFERENCES=1 # tests against reference libraries fail where those are missing

./build.sh build || exit 1
failed=0

echo "== go vet, gofmt"
unformatted=$(gofmt -l sim render wasm)
[ -z "$unformatted" ] || { echo "not formatted: $unformatted"; failed=$((failed + 1)); }
go vet ./sim/... ./render/scene ./render/raster || failed=$((failed + 1))
GOOS=js GOARCH=wasm go vet ./wasm/... ./render/view || failed=$((failed + 1))

echo "== go test"
go test -json ./sim/... ./render/scene ./render/raster >"$log/go.json"
node site/test/gocount.mjs "$log/go.json" "$log/go.count" || true

echo "== the same networks on arm64 (under an emulator) and in WebAssembly"
bits=0
(GOARCH=arm64 go test -c -o "$log/arm64" ./sim/growth && cd sim/growth && qemu-aarch64 "$log/arm64" -test.run DigestsArePinned) && bits=$((bits + 1)) || failed=$((failed + 1))
(GOOS=js GOARCH=wasm go test -c -o "$log/wasm" ./sim/growth && cd sim/growth && "$(go env GOROOT)/lib/wasm/go_js_wasm_exec" "$log/wasm" -test.run DigestsArePinned) && bits=$((bits + 1)) || failed=$((failed + 1))

echo "== page"
(cd site && npx tsc --noEmit) || failed=$((failed + 1))
rm -rf site/build/test && mkdir -p site/build/test
site/node_modules/.bin/esbuild site/test/unit/*.test.ts site/test/page/*.test.ts --bundle --platform=node --format=esm --packages=external --outdir=site/build/test --out-extension:.js=.mjs --log-level=error --jsx=automatic --jsx-import-source=preact || exit 1
node --test --test-concurrency=1 --test-timeout=240000 --test-reporter=spec --test-reporter-destination=stdout --test-reporter=tap --test-reporter-destination="$log/page.tap" site/build/test/unit/*.mjs site/build/test/page/*.mjs

read -r gopass gofail <"$log/go.count"
pass=$(awk '/^# pass/ {n = $3} END {print n + 0}' "$log/page.tap")
fail=$(awk '/^# fail|^# cancelled/ {n += $3} END {print n + 0}' "$log/page.tap")
total=$((gopass + bits + pass))
failed=$((failed + gofail + fail))
[ "$gopass" -gt 0 ] && [ "$pass" -gt 0 ] || failed=$((failed + 1))
echo "$total passed, $failed failed"
[ "$failed" -eq 0 ]
