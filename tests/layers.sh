#!/usr/bin/env bash
# Folder is layer: each may include only what the table says. Prints every include that breaks it.
# Usage: bash tests/layers.sh [SOURCE_TREE]
set -euo pipefail
cd "${1:-$(dirname "$0")/..}"

# folder: what its files may include, as a pattern over the included path
declare -A allowed=(
    [dsp/base]='dsp/base/|Eigen/'
    [dsp/string]='dsp/(base|string)/|Eigen/'
    [dsp/board]='dsp/(base|string|board)/|Eigen/'
    [dsp/tuning]='dsp/(base|tuning)/'
    [dsp/design]='dsp/(base|string|board|design)/|Eigen/'
    # The engine runs plain designed numbers: it sees their types, never how they are made.
    [dsp/engine]='dsp/(base|engine)/|dsp/design/(InstrumentDesign|LoopDesign|ModeFilter|PlaceDesign|Sections)\.h|dsp/board/Soundboard\.h|dsp/string/Partials\.h'
    [dsp/playing]='dsp/(base|string|board|tuning|design|engine|playing)/'
    [dsp/analysis]='dsp/(base|analysis)/|Eigen/|unsupported/Eigen/'
    [Source/document]='dsp/|Source/document/|juce_core/'
    [Source/report]='dsp/|Source/(document|report)/|juce_core/'
    [Source/console]='dsp/|Source/(document|report|console)/|juce_(core|audio_basics|audio_formats)/'
    [Source/plugin]='dsp/|Source/(document|report|plugin|editor)/|juce_|PresetData\.h'
    [Source/editor]='dsp/|Source/(document|report|plugin|editor)/|juce_|PresetData\.h'
)

included='[<"]([^>"]+)[>"]'
broken=0
files=0
for folder in "${!allowed[@]}"; do
    [ -d "$folder" ] || continue
    while IFS= read -r file; do
        files=$((files + 1))
        while IFS= read -r line; do
            [[ "$line" =~ $included ]] || continue
            path=${BASH_REMATCH[1]}
            # The standard library and the system have no folder in their names, or one of these.
            [[ "$path" =~ ^[a-z_0-9]+(\.h)?$ || "$path" =~ ^sys/ ]] && continue
            if ! [[ "$path" =~ ^(${allowed[$folder]}) ]]; then
                echo "$file:${line%%:*}: may not include $path"
                broken=$((broken + 1))
            fi
        done < <(grep -nE '^[[:space:]]*#[[:space:]]*include' "$file" || true)
    done < <(find "$folder" -name '*.h' -o -name '*.cpp' | grep "^$folder/" | sort)
done
[ "$files" -gt 0 ] || { echo "no sources found"; exit 1; }
echo "$files files read, $broken includes out of place"
[ "$broken" -eq 0 ]
