#!/usr/bin/env bash
# Writes the signatures between the keys of Debian's main keyring (package debian-keyring) as a link log: signature time,
# signing key id, signed key id; the earliest of repeated signatures, no self-signatures, key ids only.
set -euo pipefail
ring=${1:-/usr/share/keyrings/debian-keyring.gpg}
home=$(mktemp -d)
trap 'rm -rf "$home"' EXIT
echo time,source,target
gpg --homedir "$home" --batch --quiet --no-default-keyring --keyring "$ring" --with-colons --list-sigs 2>/dev/null | awk -F: '
  $1 == "pub" { key = $5; inring[key] = 1 }
  $1 == "sig" && $5 != key && $6 ~ /^[0-9]+$/ {
    pair = $5 "," key
    if (!(pair in first) || $6 + 0 < first[pair]) first[pair] = $6 + 0
  }
  END {
    for (pair in first) {
      split(pair, id, ",")
      if (id[1] in inring) print first[pair] "," pair
    }
  }' | sort -t, -k1,1n -k2,2 -k3,3
