#!/usr/bin/env bash
# Installs the Debian 12 packages that Lastscan needs, group by group, and only
# those that are missing. Works as root or with sudo; does nothing and needs
# neither when all are there.
#
#   config/install-packages.sh [--build] [--test] [--sanitizers] [--browser]
#
# Without a group: --build.
set -euo pipefail

build=(g++ cmake ninja-build pkg-config libzmq3-dev cppzmq-dev libprotobuf-dev protobuf-compiler
  libspdlog-dev libeigen3-dev libboost-dev libsqlite3-dev libsqlitecpp-dev libtomlplusplus-dev
  libcli11-dev libsystemd-dev libcpp-httplib-dev libpugixml-dev
  # CMakeLists.txt names the tests' and benches' libraries too.
  libgtest-dev libgmock-dev)
test=(libbenchmark-dev python3 python3-numpy python3-scipy python3-zmq python3-protobuf
  ca-certificates openssl tmux)
sanitizers=(clang libclang-rt-14-dev)
browser=(chromium fonts-dejavu-core)

# Tools that are often there from elsewhere than Debian: only where they are missing.
command -v node >/dev/null || test+=(nodejs)
command -v npm >/dev/null || test+=(npm)

usage() { sed -n '2,8s/^# \{0,1\}//p' "$0"; }

wanted=()
for argument in "${@:---build}"; do
  case "$argument" in
    --build) wanted+=("${build[@]}") ;;
    --test) wanted+=("${test[@]}") ;;
    --sanitizers) wanted+=("${sanitizers[@]}") ;;
    --browser) wanted+=("${browser[@]}") ;;
    --help | -h)
      usage
      exit 0
      ;;
    *)
      echo "install-packages.sh: unknown group $argument; see --help" >&2
      exit 2
      ;;
  esac
done

missing=()
for package in "${wanted[@]}"; do
  state=$(dpkg-query -W -f='${db:Status-Status}' "$package" 2>/dev/null || true)
  [[ $state == installed ]] || missing+=("$package")
done
((${#missing[@]})) || exit 0

as_root=()
if ((EUID != 0)); then
  if ! command -v sudo >/dev/null; then
    echo "install-packages.sh: run as root or install sudo; missing: ${missing[*]}" >&2
    exit 1
  fi
  as_root=(sudo)
fi
echo "Installing ${missing[*]}"
# Another run of apt may hold the lock for a while.
apt=("${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get -q -o DPkg::Lock::Timeout=300)
"${apt[@]}" update
"${apt[@]}" install -y --no-install-recommends "${missing[@]}"
