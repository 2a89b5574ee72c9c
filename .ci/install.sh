#!/usr/bin/env bash
# Installs those packages of .ci/packages that are missing, with sudo where the caller is not root, and what
# the wall page and its tests need from npm (the lock files say what). Silent where nothing is missing.
set -euo pipefail
here=$(cd "$(dirname "${BASH_SOURCE[0]}")" && pwd)

missing=()
while read -r package; do
    case "$package" in '' | '#'*) continue ;; esac
    dpkg-query -W -f='${db:Status-Status}\n' "$package" 2>/dev/null | grep -qx installed || missing+=("$package")
done <"$here/packages"
# Where a newer Node.js than Debian's is installed, its npm serves as well.
command -v npm >/dev/null || missing+=(nodejs npm)

stale=()
for folder in "$here/../estimator/wall/page" "$here/../tests/browser"; do
    [ "$folder/node_modules/.package-lock.json" -nt "$folder/package-lock.json" ] || stale+=("$folder")
done
[ ${#missing[@]} -gt 0 ] || [ ${#stale[@]} -gt 0 ] || exit 0

log=$(mktemp)
trap 'rm -f "$log"' EXIT
quietly() {
    if ! "$@" >"$log" 2>&1; then
        cat "$log" >&2
        echo "failed: $*" >&2
        return 1
    fi
}

as_root=()
if [ ${#missing[@]} -gt 0 ] && [ "$(id -u)" -ne 0 ]; then
    if ! command -v sudo >/dev/null; then
        echo "Missing Debian packages: ${missing[*]}" >&2
        echo "Install them as root (apt-get install ...), then run this again." >&2
        exit 1
    fi
    as_root=(sudo)
fi

if [ ${#missing[@]} -gt 0 ]; then
    echo "Installing: ${missing[*]}"
    quietly "${as_root[@]}" apt-get update -qq
    quietly "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive \
        apt-get install -y -qq --no-install-recommends "${missing[@]}"
fi
for folder in "${stale[@]}"; do
    echo "Installing from npm: ${folder#"$here/../"}"
    quietly npm ci --prefix "$folder" --ignore-scripts --no-audit --no-fund
    touch "$folder/node_modules/.package-lock.json"
done
