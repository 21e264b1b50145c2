#!/usr/bin/env bash
# Sets up, builds, runs the first example and shows its result.
set -euo pipefail
root=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
bash "$root/.ci/setup" "$root/build" -DBUILD_TESTING=OFF
"$root/build/bin/tarn" run "$root/examples/01_avoided_crossing/crossing.tarn" --out "$root/build/first-results"
