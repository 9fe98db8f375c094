#!/bin/sh
# Installs what is missing, builds Picket into build/ and answers the first question of the README:
# where are the stop bands of the bus section, and how far is its operating band from them?
set -eu
cd "$(dirname "$0")/.."
sh tests/setup/packages.sh build >&2
# The tests need packages that a user need not have.
sh tests/setup/configure.sh release -DPICKET_TESTS=OFF >&2
cmake --build build --parallel >&2
exec build/picket edges examples/bus_section.yaml "$@"
