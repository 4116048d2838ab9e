#!/usr/bin/env bash
# Builds Hitchpin and does its main job once: the schedule of a preset, the audition of its scale as a WAV, and,
# where there is a display, the app. Usage: bash Source/run.sh [INSTRUMENT.json]
set -euo pipefail
cd "$(dirname "$0")/.."

bash Source/packages.sh
# The compiler cache lies outside the project and serves every checkout of it, wherever that stands.
export CCACHE_BASEDIR=$PWD CCACHE_NOHASHDIR=true
echo "Configuring and building (the first time takes some minutes) ..."
cmake --preset release >build-configure.log 2>&1 || { cat build-configure.log >&2; exit 1; }
mv build-configure.log build/configure.log
cmake --build build --target hitchpin_console HitchpinPlugin_Standalone

instrument=${1:-presets/lap-harp.json}
audition=build/$(basename "$instrument" .json)-scale.wav
echo
build/hitchpin schedule "$instrument"
echo
build/hitchpin sound "$instrument" --scale --out "$audition"
echo
echo "The scale is in $audition"

app=build/Source/HitchpinPlugin_artefacts/Release/Standalone/Hitchpin
if [ -n "${DISPLAY:-}" ]; then
    echo "Opening the app ($app); close its window to end."
    exec "$app"
fi
echo "No display here: the app is $app"
