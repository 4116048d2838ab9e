#!/usr/bin/env bash
# Checks an LV2 bundle with LV2's own validator, but for what JUCE itself causes, and that it carries our URI.
# Usage: bash validate-lv2.sh BUNDLE [spoil]   With "spoil" a fault is put into a copy first: the check must find it.
set -euo pipefail
uri=https://hitchpin.example/instrument
scratch=$(mktemp -d)
trap 'rm -rf "$scratch"' EXIT
cp "$1"/*.ttl "$scratch"
if [ "${2:-}" = spoil ]; then
    printf '\n<%s> <http://lv2plug.in/ns/lv2core#minorVersion> "many" .\n' "$uri" >>"$scratch/dsp.ttl"
fi

grep -q "<$uri>" "$scratch/manifest.ttl" || { echo "the manifest does not hold $uri"; exit 1; }

# One line an error: what, subject, property, object.
lv2_validate "$scratch"/*.ttl >"$scratch/said" 2>&1 || true
grep -q '^Found [0-9]* errors\? among' "$scratch/said" || { cat "$scratch/said"; echo "the validator did not finish"; exit 1; }
awk '/^error:/ { if (line) print line; line = $0; next } /^ +[^ ]/ { if (line) line = line " | " $1; next }
     /^Found/ { if (line) print line; line = "" }' "$scratch/said" >"$scratch/errors"

# Written by JUCE 7.0.5's own LV2 client for every plug-in: doap statements at the plug-in, user-interface features
# that the specifications do not list as such, and a property for programs without a label.
by_juce='doap#maintainer|doap#release|ui#noUserResize|ext/options#interface|'"$uri"':Program'
if grep -vE "$by_juce" "$scratch/errors"; then
    echo "LV2's validator finds the above"
    exit 1
fi
echo "valid but for $(wc -l <"$scratch/errors") complaints that JUCE itself causes"
