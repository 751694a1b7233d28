#!/usr/bin/env bash
# Shows Lastscan at work on an invented lab: builds it, starts a daemon of its
# own in a temporary folder, feeds it three invented samples much faster than a
# spectrometer would, and prints the advice as it changes. Needs no terminal.
#
#   config/demo.sh [--keep]
#
# --keep leaves the temporary folder with the ledger; otherwise nothing is left
# but the build. LASTSCAN_BUILD names another build folder than build/.
set -euo pipefail

here=$(cd "$(dirname "${BASH_SOURCE[0]}")" && pwd)
root=$(dirname "$here")
build=$(realpath -m "${LASTSCAN_BUILD:-$root/build}")
keep=no
for argument in "$@"; do
  case "$argument" in
    --keep) keep=yes ;;
    --help | -h)
      sed -n '2,9s/^# \{0,1\}//p' "$0"
      exit 0
      ;;
    *)
      echo "demo.sh: unknown option $argument; see --help" >&2
      exit 2
      ;;
  esac
done

bold='' plain=''
if [[ -t 1 && -z ${NO_COLOR:-} ]]; then
  bold=$'\033[1m' plain=$'\033[0m'
fi
say() { printf '\n%s%s%s\n' "$bold" "$*" "$plain"; }

say "1. Packages and build"
bash "$here/install-packages.sh" --build
launcher=()
if command -v ccache >/dev/null; then
  launcher=(-DCMAKE_CXX_COMPILER_LAUNCHER=ccache)
fi
mkdir -p "$build"
if ! cmake -G Ninja -S "$root" -B "$build" "${launcher[@]}" >"$build/demo-configure.log" 2>&1; then
  cat "$build/demo-configure.log" >&2
  exit 1
fi
ninja -C "$build" lastscan lastscand

work=$(mktemp -d /tmp/lastscan-demo.XXXXXX)
daemon=
clean_up() {
  if [[ -n $daemon ]]; then
    kill "$daemon" 2>/dev/null || true
    wait "$daemon" 2>/dev/null || true
  fi
  if [[ $keep == no ]]; then
    rm -rf "$work"
  fi
}
trap clean_up EXIT
trap 'exit 130' INT
trap 'exit 143' TERM

say "2. A daemon of our own"
cat >"$work/lastscan.toml" <<SETTINGS
ledger_path = "$work/ledger.sqlite"
[service]
request_endpoint = "ipc://$work/request.sock"
broadcast_endpoint = "ipc://$work/broadcast.sock"
[log]
target = "$work/lastscand.log"
SETTINGS
"$build/lastscand" --settings "$work/lastscan.toml" --check
"$build/lastscand" --settings "$work/lastscan.toml" >"$work/lastscand.out" 2>&1 &
daemon=$!
at="ipc://$work/request.sock"
lastscan=("$build/lastscan")
for ((tries = 100; ; --tries)); do
  if "${lastscan[@]}" runs --at "$at" >/dev/null 2>&1; then
    break
  fi
  if ((tries == 0)) || ! kill -0 "$daemon" 2>/dev/null; then
    echo "demo.sh: the daemon did not start; it said:" >&2
    cat "$work/lastscand.out" >&2
    exit 1
  fi
  sleep 0.1
done
echo "lastscand answers at $at"

# Shows a rehearsal's advice as it changes: each new verdict, and every eighth
# look in between. The cautions come once, with the ledger.
as_it_changes() {
  awk '/\| scan / {
         sub(/^.*\| /, "  ")
         verdict = $0
         sub(/^[^:]*: /, "", verdict)
         sub(/;.*/, "", verdict)
         if (verdict != before || ++since == 8) { print; fflush(); since = 0 }
         before = verdict
         next
       }
       /^- / { cautions = 1 }
       NF && !cautions { print; fflush() }'
}
rehearse() {
  "${lastscan[@]}" rehearse --scenario "$1" --obey --feed --pace 0.1 --at "$at" | as_it_changes
}

say "3. A strong sample: enough long before the plan ends"
rehearse strong-sample
say "4. The plan is too short, the night is not"
rehearse needs-more
say "5. Far too little substance in the tube"
rehearse hopeless

say "6. The ledger keeps what was advised and what was reached"
"${lastscan[@]}" ledger --at "$at"

say "Where to look next"
tool=${build#"$root/"}/lastscan
next() { printf '  %-34s %s\n' "$1" "$2"; }
next "README.md" "how to connect a real spectrometer"
next "config/lastscan.toml" "every setting, explained in place"
next "$tool rehearse --list" "more invented runs, with faults"
next "$tool assess FILE..." "the same advice on files, without a daemon"
next "$tool page" "all runs on a web page"
if [[ $keep == yes ]]; then
  cat <<NEXT
The demo's folder stays: $work
  $build/lastscand --settings $work/lastscan.toml
  $build/lastscan ledger --at $at
NEXT
fi
