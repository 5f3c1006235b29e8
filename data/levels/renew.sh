#!/usr/bin/env bash
# Computes the level lists of this folder anew, from the lowest level to beyond the 300th:
#     bash data/levels/renew.sh               all of them
#     bash data/levels/renew.sh stadium disk  those of some shapes
# With the quarter stadium, data/quarter-stadium.csv, the list of the example of the README, is computed as well.
# Every list begins with the command that made it. Needs the Rust toolchain, nothing else.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/../.."

# Shape, class (- for all levels), end of the window in k: where the smooth count (`weyl`) reaches about 312. A fourth word
# is a list elsewhere.
lists="
annulus         -    43
cardioid        -    30
cardioid        odd  42.5
disk            -    36.5
ellipse         -    47
equilateral     -    99
half-disk       -    52
l-shape         -    37.5
lemon           -    42.5
limacon         -    35
mushroom        -    40.5
oval            -    36.5
pentagon        -    49.5
quarter-stadium -    48.5
quarter-stadium -    46    data/quarter-stadium.csv
quarter-stadium -    86    data/levels/quarter-stadium-1000.csv
rectangle       -    57
right-isosceles -    92
sinai           -    73.5
sinai-eighth    -    205
slit-square     -    65.5
stadium         -    24.5
"

cargo build --release --quiet
failed=()
while read -r shape class to elsewhere; do
    if [ -z "$shape" ] || { [ $# -gt 0 ] && [[ " $* " != *" $shape "* ]]; }; then
        continue
    fi
    call=(levels "billiards/$shape.toml" --k "0:$to")
    list="data/levels/$shape.csv"
    if [ "$class" != - ]; then
        call+=(--class "$class")
        list="data/levels/$shape-$class.csv"
    fi
    list="${elsewhere:-$list}"
    printf '%s\n' "$list"
    {
        printf '# computed for this project: orbitsum %s --format csv\n' "${call[*]}"
        cargo run --release --quiet -- "${call[@]}" --format csv --quiet </dev/null
    } >"$list.new" && mv "$list.new" "$list" || {
        rm -f "$list.new"
        failed+=("$list")
    }
done <<<"$lists"

if [ ${#failed[@]} -gt 0 ]; then
    printf 'not renewed: %s\n' "${failed[*]}" >&2
    exit 1
fi
