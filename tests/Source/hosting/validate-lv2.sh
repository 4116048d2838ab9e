#!/usr/bin/env bash
# Checks an LV2 bundle with LV2's own validator, but for what JUCE itself causes, and that it carries our URI.
# Usage: bash validate-lv2.sh BUNDLE
set -euo pipefail
bundle=$1
grep -q '<https://hitchpin.example/instrument>' "$bundle"/*.ttl || { echo "our URI is not in the bundle"; exit 1; }
# sord_validate exits 1 for any complaint; its words are judged below.
output=$(lv2_validate "$bundle"/*.ttl 2>&1 || true)
echo "$output"
