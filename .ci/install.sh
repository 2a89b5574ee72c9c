#!/usr/bin/env bash
# Installs those packages of .ci/packages that are missing, with sudo where the caller is not root, and the wall
# page's plotting library (npm; the lock file says which). Silent where nothing is missing.
set -euo pipefail
here=$(cd "$(dirname "${BASH_SOURCE[0]}")" && pwd)

missing=()
while read -r package; do
    case "$package" in '' | '#'*) continue ;; esac
    dpkg-query -W -f='${db:Status-Status}\n' "$package" 2>/dev/null | grep -qx installed || missing+=("$package")
done <"$here/packages"
# Where a newer Node.js than Debian's is installed, its npm serves as well.
command -v npm >/dev/null || missing+=(nodejs npm)

page=$here/../estimator/wall/page
page_ready() { [ "$page/node_modules/.package-lock.json" -nt "$page/package-lock.json" ]; }
[ ${#missing[@]} -gt 0 ] || ! page_ready || exit 0

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
if ! page_ready; then
    echo "Installing the wall page's plotting library"
    quietly npm ci --prefix "$page" --omit=dev --ignore-scripts --no-audit --no-fund
    touch "$page/node_modules/.package-lock.json"
fi
