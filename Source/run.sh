#!/usr/bin/env bash
# Builds Hitchpin and does its main job once: the schedule of a preset, the audition of its scale as a WAV, and,
# where there is a display, the app. Usage: bash Source/run.sh [INSTRUMENT.json]
set -euo pipefail
[ $# -eq 0 ] || set -- "$(realpath -- "$1")"
cd "$(dirname "$0")/.."

source Source/configure.sh
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
