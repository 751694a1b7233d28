#!/bin/bash
# Fetches the open NMR data that the published tests read, checks them against the
# integrity stated with the project, and unpacks them into a folder outside the source
# tree. The data (MIT license) are never part of this repository.
#
# Usage: open_data.sh [FOLDER]      default: $LASTSCAN_OPEN_DATA
# Prints the folder to set LASTSCAN_OPEN_DATA to. Does nothing when it is there already.
set -euo pipefail

package=jcamp-data-test
version=0.2.1
integrity='+UWtujqJ7wcluL/m4lzFCrKvhWtron35BaIQvx2f1CaTJ8ePYlhF/3eWHvv/EiwtIg5XLeRJozsl3EoxMFGFBA=='

folder=${1:-${LASTSCAN_OPEN_DATA:-}}
if [[ -z $folder ]]; then
  echo "open_data.sh: no folder: name one, or set LASTSCAN_OPEN_DATA" >&2
  exit 2
fi
folder=$(realpath -m "$folder")
source_tree=$(cd "$(dirname "$0")/../.." && pwd)
case $folder/ in
  "$source_tree"/build*/*) ;;
  "$source_tree"/*)
    echo "open_data.sh: $folder lies in the source tree: name a folder outside it" >&2
    exit 2 ;;
esac

mkdir -p "$folder"

# Written last, so a fetch that was cut off is not taken for a whole one.
mark=$folder/.checked
if [[ -f $mark && $(<"$mark") == "$integrity" ]]; then
  echo "$folder"
  exit 0
fi

work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
if ! (cd "$work" && npm pack --silent "$package@$version" >/dev/null); then
  echo "open_data.sh: npm could not fetch $package $version: is the network there?" >&2
  exit 1
fi
archive=$work/$package-$version.tgz
found=$(openssl dgst -sha512 -binary "$archive" | base64 -w0)
if [[ $found != "$integrity" ]]; then
  echo "open_data.sh: $package $version is not what it was: sha512 $found" >&2
  exit 1
fi
tar -xzf "$archive" -C "$folder" --strip-components=2 package/data
echo "$integrity" > "$mark"
echo "$folder"
