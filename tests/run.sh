#!/usr/bin/env bash
# Installs what is missing, builds Holdfast, and runs every test. Quiet where nothing is wrong; ends with ctest's own
# closing lines.
#   bash tests/run.sh              as released
#   bash tests/run.sh --sanitize   with AddressSanitizer and UndefinedBehaviorSanitizer first, then as released
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

sanitize=no
case "${1-}" in
    '') ;;
    --sanitize) sanitize=yes ;;
    *)
        echo "usage: bash tests/run.sh [--sanitize]" >&2
        exit 2
        ;;
esac

bash .ci/install.sh

log=$(mktemp)
trap 'rm -f "$log"' EXIT
quietly() {
    "$@" >"$log" 2>&1 || {
        cat "$log"
        echo "failed: $*"
        exit 1
    }
}

# What cmake and ctest call the pass is the preset's name (CMakePresets.json).
pass() {
    local preset=$1
    echo "== $preset: building"
    quietly cmake --preset "$preset" -DHOLDFAST_TESTS=ON
    quietly cmake --build --preset "$preset"
    echo "== $preset: testing"
    quietly ctest --preset "$preset" -j "$(nproc)"
    tail -n 4 "$log"
}

if [ "$sanitize" = yes ]; then
    pass sanitize
fi
pass release
