#!/usr/bin/env bash
# The suite once more under the address and undefined-behaviour sanitizers, in a folder of its own.
set -euo pipefail
root=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
bash "$root/.ci/setup" "$root/build-sanitized" -DTARN_SANITIZE=ON -DTARN_VERIFY=ON "$@"
ulimit -s 65536  # frames of instrumented code are several times as large
# Instrumented programs take many times as long as others.
ctest --timeout 7200 --test-dir "$root/build-sanitized" --output-on-failure --parallel 2
