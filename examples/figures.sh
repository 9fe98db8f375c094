#!/bin/sh
# Draws the figures of every example into a folder, usually examples/figures, with `picket` of the build:
#   sh examples/figures.sh [FOLDER [FORMAT]]      FORMAT: svg (usually), png or pdf
set -eu

here=$(cd "$(dirname "$0")" && pwd)
folder=${1:-$here/figures}
format=${2:-svg}
picket=${PICKET_TOOL:-$here/../build/picket}
mkdir -p "$folder"

draw() {
  name=$1
  shift
  # 1 is a partial result, which is drawn and marked.
  "$picket" "$@" --quiet --figure "$folder/$name.$format" >/dev/null || [ $? -eq 1 ]
  printf '%s\n' "$folder/$name.$format"
}

for file in bus_section mirror_stack pillar_lattice bus_channel wire; do
  draw "${file}_map" check "$here/$file.yaml"
done
draw bus_section_edges edges "$here/bus_section.yaml"
draw bus_section_index index --accuracy 1e-2 "$here/bus_section.yaml" \
  --set 'light.wavelength_nm={from: 1380, to: 1600, points: 12}'
# From half way to the zone edge: further down the guided band is where its silica is not known.
draw bus_section_bands bands --accuracy 1e-2 --count 1 --points 6 "$here/bus_section.yaml" \
  --set 'path=[{at: [0.5, 0]}, {at: [1, 0]}]'
draw mirror_stack_edges edges --count 3 "$here/mirror_stack.yaml"
draw mirror_stack_bands bands "$here/mirror_stack.yaml"
draw mirror_stack_index index "$here/mirror_stack.yaml" --set 'light.wavelength_nm={from: 1300, to: 1900, points: 25}'
draw pillar_lattice_bands bands --accuracy 1e-2 --count 5 --points 8 "$here/pillar_lattice.yaml"
draw wire_modes modes --accuracy 1e-2 --count 2 "$here/wire.yaml" --set light.wavelength_nm=1550
draw bus_channel_edges edges --accuracy 1e-2 "$here/bus_channel.yaml"
