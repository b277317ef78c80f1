#!/bin/sh
# tests/install.sh -- installs the Debian packages that are missing.
#
# sh tests/install.sh build    what the engine is built from (samples/run.sh)
# sh tests/install.sh test     that, and what the tests compare with (tests/run.sh)
set -eu

build="g++ cmake ninja-build libeigen3-dev libboost-dev libboost-math-dev nlohmann-json3-dev doctest-dev
  libcli11-dev libcsv-dev libxxhash-dev python3"
test="clang clang-format git python3-scipy python3-statsmodels python3-mpmath python3-sklearn
  python3-pandas python3-matplotlib python3-ipykernel python3-nbclient"

case ${1:-} in
  build) wanted=$build ;;
  test) wanted="$build $test" ;;
  *)
    echo "usage: sh tests/install.sh build|test" >&2
    exit 2
    ;;
esac

if ! command -v dpkg-query >/dev/null; then
  echo "Not a Debian system: nothing installed. Needed, under Debian's names: $wanted"
  exit 0
fi

# shellcheck disable=SC2086  # the lists are words
here=$(dpkg-query --show --showformat='|${Package} ${db:Status-Status}|' $wanted 2>/dev/null) || true
missing=
for package in $wanted; do
  case $here in
    *"|$package installed|"*) ;;
    *) missing="$missing $package" ;;
  esac
done
if [ -z "$missing" ]; then
  echo "Nothing is missing."
  exit 0
fi

if [ "$(id -u)" -eq 0 ]; then
  as_root=
elif command -v sudo >/dev/null; then
  as_root=sudo
else
  echo "Missing:$missing. Neither root nor sudo is at hand; install these and run this again." >&2
  exit 1
fi
echo "Installing:$missing"
$as_root apt-get -qq update || echo "The package lists could not be renewed; trying with those at hand." >&2
# shellcheck disable=SC2086
$as_root env DEBIAN_FRONTEND=noninteractive apt-get -qq -y --no-install-recommends install $missing >/dev/null
