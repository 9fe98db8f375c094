#!/bin/sh
# The whole test suite: installs what is missing, then
#   release    gcc, warnings are errors; every test, the walls and the header checks among them
#   clang      the second compiler's warnings are errors
#   asan       the quick tests under the address and undefined-behaviour sanitizers
#   coverage   the quick tests again, counting which lines run
# Goes on after a failure, so that one run shows everything. The last line sums up what ctest said.
set -u
cd "$(dirname "$0")/.." || exit 1
jobs=$(nproc 2>/dev/null || echo 2)
logs=build/logs
passed=0
failed=0
problems=""

problem() {
  problems="$problems; $1"
  printf 'FAILED: %s\n' "$1"
}

heading() {
  printf '\n== %s\n' "$*"
}

# build <preset> <folder>
build() {
  preset=$1
  folder=$2
  heading "$preset: build"
  sh tests/setup/configure.sh "$preset" -DPICKET_TESTS=ON -DPICKET_WERROR=ON \
    >"$logs/$preset.configure" 2>&1 || {
    cat "$logs/$preset.configure"
    problem "$preset does not configure"
    return 1
  }
  cmake --build "$folder" --parallel "$jobs" >"$logs/$preset.build" 2>&1 || {
    # Errors first show up in the middle of a parallel build: show those lines, then the end.
    grep -E -A 4 '(error|warning|undefined reference)' "$logs/$preset.build" | head -n 60
    tail -n 20 "$logs/$preset.build"
    problem "$preset does not build"
    return 1
  }
}

# run_tests <preset> <folder> [ctest arguments]; counts what ctest itself reports.
run_tests() {
  preset=$1
  folder=$2
  shift 2
  heading "$preset: tests"
  {
    ctest --test-dir "$folder" --parallel "$jobs" --output-on-failure --no-tests=error "$@"
    echo $? >"$logs/$preset.status"
  } 2>&1 | tee "$logs/$preset.tests"
  # ctest: "97% tests passed, 2 tests failed out of 61"
  counts=$(sed -n 's/^[0-9]*% tests passed, \([0-9]*\) tests\{0,1\} failed out of \([0-9]*\).*/\1 \2/p' \
    "$logs/$preset.tests" | tail -n 1)
  lost=${counts% *}
  total=${counts#* }
  if [ -z "$counts" ] || [ "$total" -eq 0 ]; then
    problem "$preset ran no tests"
    return 1
  fi
  passed=$((passed + total - lost))
  failed=$((failed + lost))
  if [ "$(cat "$logs/$preset.status")" -ne 0 ]; then
    problem "$preset: $lost of $total tests failed"
    return 1
  fi
}

coverage_summary() {
  heading "coverage: summary"
  # By its full path for the same reason as python3 in tests/CMakeLists.txt.
  /usr/bin/gcovr --root . --filter src/ --exclude-unreachable-branches --print-summary \
    build/coverage 2>"$logs/gcovr.errors" || {
    cat "$logs/gcovr.errors"
    problem "coverage could not be counted"
  }
}

if ! sh tests/setup/packages.sh build test; then
  echo "FAILED: packages are missing, no test was run"
  exit 1
fi
mkdir -p "$logs"
# configure.sh may empty build/; the logs stay.
: >"$logs/made-by.txt"

if build release build; then
  run_tests release build
fi
build clang build/clang
# The repository's own tests look at the same files in every build: once is enough.
quick='^(slow|repo)$'
if build asan build/asan; then
  run_tests asan build/asan --label-exclude "$quick"
fi
if build coverage build/coverage; then
  find build/coverage -name '*.gcda' -exec rm -f {} +
  run_tests coverage build/coverage --label-exclude "$quick"
  coverage_summary
fi

echo
if [ -n "$problems" ]; then
  echo "FAILED: $passed tests passed, $failed failed$problems"
  exit 1
fi
echo "PASSED: $passed tests passed, 0 failed (release, sanitizers, coverage; gcc and clang without a warning)"
