#!/usr/bin/env bash
# Sets up, builds and runs the whole test suite. Options go to CMake.
set -euo pipefail
root=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
bash "$root/.ci/setup" "$root/build" -DBUILD_TESTING=ON "$@"  # the first example leaves it off
ctest --test-dir "$root/build" --output-on-failure --parallel 2
