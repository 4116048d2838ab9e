#!/usr/bin/env bash
# Builds everything and runs every test through CTest. Usage: bash tests/run.sh [further ctest options]
set -euo pipefail
cd "$(dirname "$0")/.."

source Source/configure.sh
cmake --build build

echo "Running the tests ..."
# Windows are opened on a screen of their own, whether there is a display or not.
exec xvfb-run --auto-servernum --server-args="-screen 0 1600x1200x24" \
    ctest --preset release --parallel "$(nproc)" "$@"
