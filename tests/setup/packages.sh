#!/bin/sh
# Installs the Debian packages that are missing, and touches nothing when none is.
#   sh tests/setup/packages.sh build         what it takes to build and run Picket
#   sh tests/setup/packages.sh build test    what the test suite needs besides
set -eu

# libc6-dev is only recommended by gcc, so it has to be named.
build_packages="gcc libc6-dev cmake make pkg-config
  libsuitesparse-dev libarpack2-dev libopenblas-dev libyaml-dev libjansson-dev libhdf5-dev"
# gfortran brings the library that a static link of OpenBLAS names.
test_packages="gnuplot-nox libcmocka-dev g++ gfortran clang clang-format gcovr
  python3 python3-numpy python3-scipy python3-mpmath python3-jsonschema python3-yaml python3-h5py
  python3-pytest python3-pip python3-setuptools python3-wheel python3-matplotlib"

say() {
  printf 'picket set-up: %s\n' "$*" >&2
}

wanted=""
for list in "$@"; do
  case $list in
    build) wanted="$wanted $build_packages" ;;
    test) wanted="$wanted $test_packages" ;;
    *) say "unknown list '$list', must be build or test"; exit 2 ;;
  esac
done

if ! command -v dpkg-query >/dev/null 2>&1; then
  say "this is not a Debian system, so nothing is installed; needed are the equivalents of:" $wanted
  exit 0
fi

missing=""
for package in $wanted; do
  if ! dpkg-query -W -f '${db:Status-Status}\n' "$package" 2>/dev/null | grep -qx installed; then
    missing="$missing $package"
  fi
done
[ -n "$missing" ] || exit 0

as_root=""
if [ "$(id -u)" -ne 0 ]; then
  if ! command -v sudo >/dev/null 2>&1; then
    say "you are not root and there is no sudo; ask an administrator for: apt-get install$missing"
    exit 1
  fi
  as_root="sudo"
fi

say "installing$missing"
# An unreachable source need not be the one that holds what is missing: try to install all the same.
$as_root apt-get update || say "apt-get update failed, trying with the lists at hand"
$as_root env DEBIAN_FRONTEND=noninteractive \
  apt-get install -y --no-install-recommends -o DPkg::Lock::Timeout=300 $missing
