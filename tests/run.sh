#!/usr/bin/env bash
# Builds everything in build/ and runs all tests. Installs the Debian packages that are missing. Can be run again.
#   CI=true   compiler warnings count as errors
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
. tests/packages.sh
jobs=$(nproc)

install_packages "${build_packages[@]}" "${test_packages[@]}"

warnings_as_errors=OFF
[ -z "${CI:-}" ] || warnings_as_errors=ON
echo "== build: Release, in build/"
cmake -S . -B build -DCMAKE_BUILD_TYPE=Release -DWANEWALL_TESTS=ON -DWANEWALL_WERROR=$warnings_as_errors
cmake --build build -j "$jobs"

echo "== tests"
ctest --test-dir build --output-on-failure --no-tests=error -j 2
