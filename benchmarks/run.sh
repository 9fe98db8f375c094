#!/bin/sh
# Builds the benchmarks in a folder of their own and prints one line of JSON per comparison.
#   sh benchmarks/run.sh [BUILD_FOLDER]      build/benchmarks if none is given
#   sh benchmarks/run.sh convergence         prints the table of errors and orders of the schemes
#   sh benchmarks/run.sh convergence --write puts it into DEVELOPERS.md
set -eu
here=$(cd "$(dirname "$0")/.." && pwd)
table=
if [ "${1:-}" = convergence ]; then
  table=${2:-print}
  set --
fi
build=${1:-$here/build/benchmarks}
mkdir -p "$(dirname "$build")"

# Stated, not inherited: a debug or sanitizer build would compare other programs.
cmake -S "$here" -B "$build" -DCMAKE_BUILD_TYPE=Release -DPICKET_SANITIZE= -DPICKET_COVERAGE=OFF \
  -DPICKET_TESTS=OFF >"$build.log" 2>&1 || { cat "$build.log" >&2; exit 1; }
cmake --build "$build" --target benchmarks -j 2 >>"$build.log" 2>&1 || { cat "$build.log" >&2; exit 1; }

# Threads of BLAS that wait for work count as CPU time.
export OPENBLAS_NUM_THREADS=1
if [ -n "$table" ]; then
  "$build/benchmark_convergence" >"$build/convergence.md"
  cat "$build/convergence.md"
  if [ "$table" = --write ]; then
    awk -v new="$build/convergence.md" '
      /<!-- \/convergence -->/ { while ((getline line < new) > 0) print line; skip = 0 }
      !skip { print }
      /<!-- convergence -->/ { skip = 1 }' "$here/DEVELOPERS.md" >"$build/DEVELOPERS.md"
    cat "$build/DEVELOPERS.md" >"$here/DEVELOPERS.md"
  fi
  exit 0
fi
"$build/benchmark_point"
"$build/benchmark_all_modes"
"$build/benchmark_section"
cmake --build "$build" --target picket_tool -j 2 >>"$build.log" 2>&1 || { cat "$build.log" >&2; exit 1; }
/usr/bin/python3 "$here/benchmarks/wire.py" "$build/picket"
/usr/bin/python3 "$here/benchmarks/sweep_workers.py" "$build/picket" "$here/examples/bus_section.yaml"
if /usr/bin/python3 -c 'import scipy' 2>/dev/null; then
  /usr/bin/python3 "$here/benchmarks/compare_scipy.py" "$build/benchmark_peer"
  /usr/bin/python3 "$here/benchmarks/compare_edge.py" "$build/benchmark_edge" "$here/examples/bus_section.yaml"
else
  echo "benchmarks: no SciPy (package python3-scipy), its comparisons are left out" >&2
fi
