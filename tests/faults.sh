#!/usr/bin/env bash
# Puts the faults of tests/faults.txt one by one into a copy of the sources, builds it, and runs the tests that each
# is to turn red: a check that cannot fail checks nothing. Takes some minutes.
#   bash tests/faults.sh [WORDS]          those whose description holds WORDS, or all. Ends with 1 if one goes unseen
#   bash tests/faults.sh --apply [LIST]   at once: whether each still fits the sources and names tests that exist, and
#                                         whether each test that says what turns it red is named
set -euo pipefail
cd "$(dirname "$0")/.."
list=tests/faults.txt
[ "${1-}" != --apply ] || list=${2-$list}

names=() files=() was=() is=() red=() # red: names of tests, one a line
while IFS= read -r line; do
    value=${line#* }
    value=${value#"${value%%[! ]*}"}
    last=$((${#names[@]} - 1))
    case $line in
        'fault '*) names+=("$value") files+=('') was+=('') is+=('') red+=('') ;;
        'file '*) files[last]=$value ;;
        'was '*) was[last]=${value//\\n/$'\n'} ;;
        'is '*) is[last]=${value//\\n/$'\n'} ;;
        'red '*) red[last]+=$value$'\n' ;;
        '' | '#'*) ;;
        *) echo "$list: not understood: $line" >&2; exit 2 ;;
    esac
done <"$list"

# The file with the fault in it, on stdout. Fails unless what is to be replaced is there exactly once.
spoiled() {
    local text without
    text=$(cat "${files[$1]}"; echo .) # the full stop keeps the line breaks at the end
    without=${text/"${was[$1]}"/}
    if [ "$without" = "$text" ] || [ "${without/"${was[$1]}"/}" != "$without" ]; then
        echo "${names[$1]}: not exactly once in ${files[$1]}: ${was[$1]}" >&2
        return 1
    fi
    text=${text/"${was[$1]}"/"${is[$1]}"}
    printf '%s' "${text%.}"
}

if [ "${1-}" = --apply ]; then
    wrong=0
    complain() { echo "$1" >&2; wrong=$((wrong + 1)); }
    for i in "${!names[@]}"; do
        spoiled "$i" >/dev/null || wrong=$((wrong + 1))
        [ -n "${red[i]}" ] || complain "${names[i]}: turns no test red"
    done
    sources=$(find tests/dsp -name '*.cpp' -exec cat {} +)
    case_name='s/^TEST_CASE("\([^"]*\)".*/\1/p'
    tests=$(sed -n "$case_name" <<<"$sources")
    claimed=$(sed -n "/^\/\/ Turned red by/,/^TEST_CASE/$case_name" <<<"$sources" | sort -u)
    named=$(printf '%s' "${red[@]}" | sort -u)
    while IFS= read -r name; do complain "no such test: $name"; done < <(grep -Fxv "$tests" <<<"$named")
    while IFS= read -r name; do complain "in no fault's list: $name"; done < <(grep -Fxv "$named" <<<"$claimed")
    echo "${#names[@]} faults, $(wc -l <<<"$claimed") tests that name theirs, $wrong complaints"
    exit $((wrong > 0))
fi

copy=$(mktemp -d)
trap 'rm -rf "$copy"' EXIT
export CCACHE_BASEDIR=$copy CCACHE_NOHASHDIR=true CCACHE_SLOPPINESS=pch_defines,time_macros
cp -r CMakeLists.txt cmake dsp tests "$copy"
build=$copy/build log=$copy/log
make() { cmake --build "$build" --target hitchpin_dsp_tests >"$log" 2>&1; }
# Tests by name; a comma in one would divide it.
passes() { timeout 300 "$build/tests/hitchpin_dsp_tests" "${1//,/\\,}" --warn NoTests >"$log" 2>&1; }

echo "Building without a fault ..."
cmake -S "$copy" -B "$build" -G Ninja -DCMAKE_BUILD_TYPE=Release -DHITCHPIN_WITH_JUCE=OFF >"$log" 2>&1 && make ||
    { cat "$log" >&2; exit 2; }
unseen=0 tried=0
for i in "${!names[@]}"; do
    [[ ${names[i]} == *"${1-}"* ]] || continue
    tried=$((tried + 1))
    while IFS= read -r name; do
        passes "$name" || { cat "$log" >&2; echo "red without a fault: $name" >&2; exit 2; }
    done <<<"${red[i]%$'\n'}"
    spoiled "$i" >"$copy/${files[i]}"
    if ! make; then
        cat "$log" >&2
        echo "${names[i]}: does not compile"
        unseen=$((unseen + 1))
    else
        while IFS= read -r name; do
            if passes "$name"; then
                echo "${names[i]}: NOT CAUGHT by \"$name\""
                unseen=$((unseen + 1))
            else
                echo "${names[i]}: caught by \"$name\""
            fi
        done <<<"${red[i]%$'\n'}"
    fi
    cp "${files[i]}" "$copy/${files[i]}"
    make
done
echo "$tried faults tried, $unseen unseen"
[ "$tried" -gt 0 ] && [ "$unseen" -eq 0 ]
