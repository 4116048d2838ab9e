#!/usr/bin/env bash
# A plug-in shows its host its entry points and nothing of JUCE or of ours. Usage: bash exports.sh LIBRARY ENTRY_POINT
set -euo pipefail
symbols=$(nm -D --defined-only "$1" | awk '{ print $NF }')
grep -qx "$2" <<<"$symbols" || { echo "$1 has no $2"; exit 1; }
if grep -E 'juce|hitchpin|Eigen' <<<"$symbols" | head -n 20 | grep .; then
    echo "the above should stay inside $1"
    exit 1
fi
echo "$(wc -l <<<"$symbols") symbols seen, none of them ours or JUCE's"
