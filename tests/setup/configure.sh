#!/bin/sh
# Configures a build folder and starts it afresh when it was made elsewhere: by another checkout,
# another machine or other versions of the compiler and the libraries, whose leftovers cmake would
# trust.
#   sh tests/setup/configure.sh PRESET [-DNAME=VALUE ...]
# The presets are those of CMakePresets.json: `release` builds in build/, the others in build/PRESET.
set -eu
preset=$1
shift
cd "$(dirname "$0")/../.."
root=$(pwd -P)

case $preset in
  release) folder=build ;;
  *) folder=build/$preset ;;
esac
stamp=$folder/made-by.txt

made_by() {
  printf '%s\n' "$root"
  uname -m
  cmake --version | head -n 1
  cc --version 2>/dev/null | head -n 1
  for library in openblas yaml-0.1 jansson; do
    printf '%s %s\n' "$library" "$(pkg-config --modversion "$library" 2>/dev/null || echo missing)"
  done
  dpkg-query -W -f '${Package} ${Version}\n' libsuitesparse-dev libarpack2-dev libhdf5-dev \
    libcmocka-dev clang 2>/dev/null || true
}

now=$(made_by)
if [ -e "$folder" ] && [ "$(cat "$stamp" 2>/dev/null || true)" != "$now" ]; then
  # Folders of the other presets lie inside build/ and judge themselves.
  find "$folder" -mindepth 1 -maxdepth 1 ! -name made-by.txt |
    while IFS= read -r entry; do
      [ -e "$entry/made-by.txt" ] || rm -rf "$entry"
    done
fi
cmake --preset "$preset" "$@"
printf '%s\n' "$now" >"$stamp"
