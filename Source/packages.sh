#!/usr/bin/env bash
# Installs what Hitchpin is built and tested with, from Debian's own packages (Debian 12 or later).
# Does nothing where all of it is there. Called by Source/run.sh and tests/run.sh.
set -euo pipefail

packages=(
    # to build
    g++ cmake ninja-build pkg-config ccache libeigen3-dev catch2 juce-modules-source
    libasound2-dev libfreetype-dev libx11-dev libxext-dev libxinerama-dev libxrandr-dev libxcursor-dev
    libflac-dev libogg-dev libvorbis-dev libpng-dev libjpeg-dev zlib1g-dev
    # to run and test: a type face, a screen that needs no display, LV2's own checker
    fonts-dejavu-core xvfb xauth lv2-dev sordi util-linux
)

missing=()
for package in "${packages[@]}"; do
    status=$(dpkg-query -W -f='${db:Status-Status}' "$package" 2>/dev/null || true)
    [ "$status" = installed ] || missing+=("$package")
done
[ ${#missing[@]} -gt 0 ] || exit 0

if ! command -v apt-get >/dev/null; then
    echo "Hitchpin needs these Debian packages or their like: ${missing[*]}" >&2
    exit 1
fi
as_root=()
if [ "$(id -u)" -ne 0 ]; then
    command -v sudo >/dev/null || { echo "To install ${missing[*]} run this as root, or install sudo." >&2; exit 1; }
    as_root=(sudo)
fi
log=$(mktemp)
echo "Installing packages: ${missing[*]}"
# A log is kept and shown only when something fails.
if ! { "${as_root[@]}" apt-get update -q && "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive \
        apt-get install -yq --no-install-recommends "${missing[@]}"; } >"$log" 2>&1; then
    tail -n 30 "$log" >&2
    echo "The packages could not be installed; the whole log is $log" >&2
    exit 1
fi
rm -f "$log"
