#!/usr/bin/env bash
# From a fresh Debian 12 to a first reflection table: installs the Debian packages that are missing, builds the program
# in build/, runs cases/drum_under_snow.yaml and writes its record and tables. Can be run again.
#   bash cases/first_run.sh [FOLDER]      FOLDER for the results, default build/first_run
set -euo pipefail
results=${1:-}
[ -z "$results" ] || results=$(realpath -m -- "$results")
cd "$(dirname "${BASH_SOURCE[0]}")/.."
results=${results:-$PWD/build/first_run}
. tests/packages.sh

install_packages "${build_packages[@]}"

echo "== build: Release, in build/"
cmake -S . -B build -DCMAKE_BUILD_TYPE=Release -DWANEWALL_TESTS=OFF
cmake --build build -j "$(nproc)" --target wanewall

mkdir -p "$results"
scene=cases/drum_under_snow.yaml
record=$results/drum_under_snow.h5
echo "== what will be computed"
build/wanewall check "$scene"
echo "== run"
build/wanewall run "$scene" --record "$record" --force
echo "== tables"
build/wanewall tables "$record" --out "$results"

echo
echo "Done. In $results:"
ls -l "$results"
