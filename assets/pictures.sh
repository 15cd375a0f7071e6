#!/usr/bin/env bash
# Makes the README's pictures anew from the default scene.
set -euo pipefail
cd "$(dirname "$0")/.."
folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
bedswell() { cargo run --release --quiet --bin bedswell -- "$@"; }

bedswell run scenes/tree-pit.toml --out "$folder/run"
picture=(still "$folder/run" --size 1200x675)
bedswell "${picture[@]}" --out assets/cut-open.png \
    --look-at bead-0 --zoom 0.7 --azimuth 90 --elevation 8 --cut 90,0,0 --grains plain --beads skin
bedswell "${picture[@]}" --out assets/bonds.png \
    --look-at bead-0 --zoom 0.8 --azimuth 115 --elevation 14 --beads bonds
bedswell "${picture[@]}" --out assets/likeliest-place.png --look-at place-1 --grains ghosted --beads skin
