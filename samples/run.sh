#!/bin/sh
# samples/run.sh -- builds Countsel and asks it about the invented water utility in mains.csv.
#
# Works from any folder, on a fresh Debian 12: installs what is missing, builds the engine, asks three
# questions as a person would and then sends requests.jsonl as a program would. With COUNTSEL_ENGINE
# set to a built engine, that one is asked and nothing is installed or built.
set -eu
cd "$(dirname "$0")/.."

words=event=burst,events=bursts,exposure=km-years

say() { printf '\n== %s\n' "$*"; }

# Shows a command as it could be typed, then runs it.
show() {
  printf '$ countsel'
  for word in "$@"; do
    case $word in
      *[!A-Za-z0-9_.,=/:-]*) printf " '%s'" "$word" ;;
      *) printf ' %s' "$word" ;;
    esac
  done
  printf '\n'
  "$engine" "$@"
}

if [ -n "${COUNTSEL_ENGINE:-}" ]; then
  engine=$COUNTSEL_ENGINE
else
  engine=build/release/countsel
  say "Installing what is missing"
  sh tests/install.sh build
  say "Building $engine (a minute or two the first time)"
  cmake --preset release >/dev/null
  cmake --build --preset release --target countsel -- --quiet
fi

say "How often do mains burst, by material?"
show ask how_often samples/mains.csv per=100 --words "$words" \
  --roles count=bursts,exposure=km_years,group=material

say "Does cast iron burst more than PVC?"
show ask which_higher samples/mains.csv reference=pvc per=100 --words "$words" \
  --roles count=bursts,exposure=km_years,group=material \
  --only "material=cast iron" --only material=pvc

say "What drives bursts, other things held fixed?"
show ask what_drives samples/mains.csv terms=material,age,diameter,soil,pressure,zone \
  reference=material=pvc errors=scaled --words "$words" --roles count=bursts,exposure=km_years

say "The same, and more, as a program asks: countsel --files samples < samples/requests.jsonl"
"$engine" --files samples < samples/requests.jsonl
