#!/usr/bin/env bash
# Builds everything and runs every test through CTest. Usage: bash tests/run.sh [further ctest options]
set -euo pipefail
cd "$(dirname "$0")/.."

bash Source/packages.sh
# The compiler cache lies outside the project and serves every checkout of it, wherever that stands.
export CCACHE_BASEDIR=$PWD CCACHE_NOHASHDIR=true
echo "Configuring and building everything (the first time takes some minutes) ..."
cmake --preset release >build-configure.log 2>&1 || { cat build-configure.log >&2; exit 1; }
mv build-configure.log build/configure.log
cmake --build build

echo "Running the tests ..."
# Windows are opened on a screen of their own, whether there is a display or not.
exec xvfb-run --auto-servernum --server-args="-screen 0 1600x1200x24" \
    ctest --preset release --parallel "$(nproc)" "$@"
