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

# The window, as a user would drive it.
cargo build --quiet -p bedswell-viewer
exec 3< <(exec Xvfb -displayfd 1 -screen 0 1280x720x24 -nolisten tcp)
server=$!
trap 'kill "$server"; rm -rf "$folder"' EXIT
read -r display <&3
export DISPLAY=:$display
target/debug/bedswell-viewer "$folder/run" --remember none --theme dark &
viewer=$!
sleep 10
xdotool search --onlyvisible --class bedswell windowfocus
xdotool mousemove 950 20
for key in k b n; do
    xdotool key "$key"
    sleep 2
done
sleep 4
import -window root -strip -define png:compression-level=9 assets/window.png
kill "$viewer"
