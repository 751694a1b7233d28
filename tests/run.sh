#!/usr/bin/env bash
# Runs all tests on a fresh Debian 12, from the packages to the browser.
#
#   tests/run.sh                builds with warnings as errors, runs every test
#   tests/run.sh --sanitizers   the suite under address and undefined-behaviour
#                               sanitizers, the threads under the thread
#                               sanitizer, and each fuzzer for a while
#
# The last line says "N passed, N failed" and nothing else. Environment:
#   LASTSCAN_BUILD          build folder (build/)
#   LASTSCAN_OPEN_DATA      folder of the open data, when it is there already
#   LASTSCAN_FUZZ_SECONDS   time for each fuzzer (40)
set -euo pipefail

here=$(cd "$(dirname "${BASH_SOURCE[0]}")" && pwd)
root=$(dirname "$here")
build=$(realpath -m "${LASTSCAN_BUILD:-$root/build}")
fuzz_seconds=${LASTSCAN_FUZZ_SECONDS:-40}
mode=plain
case "${1:-}" in
  '') ;;
  --sanitizers) mode=sanitizers ;;
  --help | -h)
    sed -n '2,13s/^# \{0,1\}//p' "$0"
    exit 0
    ;;
  *)
    echo "run.sh: unknown option $1; see --help" >&2
    exit 2
    ;;
esac

passed=0
failed=0
finish() {
  local code=$?
  # A script that breaks off has failed, whatever it counted before.
  if ((code != 0 && failed == 0)); then
    failed=1
  fi
  printf '\n%d passed, %d failed\n' "$passed" "$failed"
  if ((code == 0 && failed > 0)); then
    exit 1
  fi
}
trap finish EXIT
# Broken off by a signal: say so by the exit code, or it would look like a success.
trap 'exit 130' INT
trap 'exit 143' TERM HUP

say() { printf '\n== %s\n' "$*"; }

launcher=()
if command -v ccache >/dev/null; then
  launcher=(-DCMAKE_CXX_COMPILER_LAUNCHER=ccache)
fi

# compile FOLDER "TARGET..." CMAKE-OPTION...: configures and builds.
compile() {
  local folder=$1 targets=$2
  shift 2
  mkdir -p "$folder"
  if ! cmake -G Ninja -S "$root" -B "$folder" "${launcher[@]}" "$@" >"$folder/configure.log" 2>&1; then
    cat "$folder/configure.log" >&2
    return 1
  fi
  # shellcheck disable=SC2086  # the targets are words
  ninja -C "$folder" $targets
}

# count_ctest FOLDER CTEST-OPTION...: runs its tests and adds them up.
count_ctest() {
  local folder=$1
  shift
  local report="$folder/ctest.xml"
  rm -f "$report"
  ctest --test-dir "$folder" --output-on-failure --parallel "$(nproc)" \
    --output-junit "$report" "$@" || true
  if [[ ! -s $report ]]; then
    echo "run.sh: no test ran in $folder" >&2
    failed=$((failed + 1))
    return
  fi
  local head tests failures skipped disabled
  head=$(grep -m1 -A8 '<testsuite ' "$report" | tr '\n' ' ')
  tests=$(attribute "$head" tests)
  failures=$(attribute "$head" failures)
  skipped=$(attribute "$head" skipped)
  disabled=$(attribute "$head" disabled)
  if ((tests == 0)); then
    echo "run.sh: no test ran in $folder" >&2
    failed=$((failed + 1))
  fi
  if ((skipped + disabled > 0)); then
    echo "run.sh: $((skipped + disabled)) tests were skipped, see above"
  fi
  passed=$((passed + tests - failures - skipped - disabled))
  failed=$((failed + failures))
}

# attribute TEXT NAME: the number in NAME="number", 0 where there is none.
attribute() {
  local number
  number=$(sed -n "s/.*[ \t]$2=\"\([0-9]*\)\".*/\1/p" <<<"$1")
  echo "${number:-0}"
}

# The open data are fetched once and checked; tests that need them fail without.
open_data() {
  if [[ -n ${LASTSCAN_OPEN_DATA:-} ]]; then
    return
  fi
  local folder="$build/open-data"
  mkdir -p "$folder"
  if bash "$here/published/open_data.sh" "$folder"; then
    export LASTSCAN_OPEN_DATA=$folder
  else
    echo "run.sh: the open data could not be fetched" >&2
    failed=$((failed + 1))
  fi
}

browser() {
  if ! bash "$root/config/install-packages.sh" --browser; then
    echo "run.sh: chromium cannot be installed here: the browser test is left out"
    return
  fi
  # The test's only package goes into the build folder, at the version and with
  # the checksum that tests/browser/package-lock.json names.
  local folder="$build/browser"
  mkdir -p "$folder"
  cp "$here/browser/package.json" "$here/browser/package-lock.json" "$folder/"
  if ! npm ci --prefix "$folder" --ignore-scripts --no-audit --no-fund; then
    echo "run.sh: the browser test's package could not be fetched" >&2
    failed=$((failed + 1))
    return
  fi
  local log="$folder/test.log" line
  NODE_PATH="$folder/node_modules" LASTSCAN_BUILD="$build" \
    timeout 300 node "$here/browser/page_test.js" 2>&1 | tee "$log" || true
  line=$(grep -E '^[0-9]+ passed, [0-9]+ failed$' "$log" | tail -n 1 || true)
  if [[ -z $line ]]; then
    echo "run.sh: the browser test broke off" >&2
    failed=$((failed + 1))
    return
  fi
  passed=$((passed + ${line%% *}))
  local rest=${line#*, }
  failed=$((failed + ${rest%% *}))
}

plain() {
  say "Packages"
  bash "$root/config/install-packages.sh" --build --test
  say "Build"
  compile "$build" all
  say "Open data"
  open_data
  say "Tests"
  count_ctest "$build"
  say "Browser"
  browser
}

# fuzz FOLDER: each fuzzer for a while, on its corpus when it has one.
fuzz() {
  local program name corpus
  for program in "$1"/fuzz_*; do
    [[ -x $program && ! -d $program ]] || continue
    name=$(basename "$program")
    corpus="$1/corpus/$name"
    mkdir -p "$corpus"
    if [[ -d $here/fuzz/corpus/$name ]]; then
      cp -n "$here/fuzz/corpus/$name"/* "$corpus/"
    fi
    say "Fuzzing: $name for $fuzz_seconds s"
    if (cd "$1" && "./$name" -max_total_time="$fuzz_seconds" -print_final_stats=1 -verbosity=0 \
      -timeout=10 -rss_limit_mb=2048 "$corpus"); then
      passed=$((passed + 1))
    else
      failed=$((failed + 1))
    fi
  done
}

sanitizers() {
  say "Packages"
  bash "$root/config/install-packages.sh" --build --test --sanitizers
  open_data
  say "Build for the address and undefined-behaviour sanitizers, with the fuzzers"
  compile "$build-address" all -DCMAKE_CXX_COMPILER=clang++ -DLASTSCAN_SANITIZE=address \
    -DLASTSCAN_FUZZERS=ON
  say "Tests under the address and undefined-behaviour sanitizers"
  export ASAN_OPTIONS="detect_leaks=1:strict_string_checks=1:detect_stack_use_after_return=1"
  export UBSAN_OPTIONS="print_stacktrace=1:halt_on_error=1"
  count_ctest "$build-address"
  fuzz "$build-address"
  say "Build for the thread sanitizer"
  compile "$build-thread" "service_tests unit_service unit_page" -DCMAKE_CXX_COMPILER=clang++ \
    -DLASTSCAN_SANITIZE=thread
  say "Threads under the thread sanitizer"
  export TSAN_OPTIONS="halt_on_error=1:second_deadlock_stack=1:suppressions=$here/service/thread_suppressions.txt"
  count_ctest "$build-thread" --exclude-regex '_NOT_BUILT$'
}

"$mode"
