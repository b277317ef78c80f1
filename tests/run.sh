#!/bin/sh
# tests/run.sh -- installs what is missing, builds and runs every test; what CI calls.
#
# sh tests/run.sh            format, the release build, every test
# sh tests/run.sh --all      before these, a build by the other compiler and the tests under the sanitizers
# sh tests/run.sh --quick    format, an incremental build, the tests not labelled slow
set -eu
cd "$(dirname "$0")/.."

case ${1:-} in
  '') quick= all= ;;
  --quick) quick=yes all= ;;
  --all) quick= all=yes ;;
  *)
    echo "usage: sh tests/run.sh [--quick | --all]" >&2
    exit 2
    ;;
esac

step() { printf '\n== %s\n' "$*"; }

# Configures and builds a preset of CMakePresets.json; ninja speaks only of what goes wrong.
build() {
  step "build $1"
  cmake --preset "$1" >/dev/null
  cmake --build --preset "$1" -- --quiet
}

# A closed or unset variable of the asker's shell must not choose another engine for the tests.
unset COUNTSEL_ENGINE

step "install"
sh tests/install.sh test

step "format"
git -c safe.directory='*' ls-files -z -- '*.cpp' '*.hpp' | xargs -0 clang-format --dry-run --Werror

if [ -n "$quick" ]; then
  build release
  step "test release, without the slow ones"
  exec ctest --test-dir build/release --output-on-failure --label-exclude slow
fi

if [ -n "$all" ]; then
  build clang
  build debug
  step "test debug: address and undefined-behaviour sanitizers"
  ctest --test-dir build/debug --output-on-failure --label-exclude slow
fi
build release
step "test release"
exec ctest --test-dir build/release --output-on-failure
