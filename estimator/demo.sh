#!/usr/bin/env bash
# Shows Holdfast at work: installs what is missing, builds, and streams a bundled outing from the on-car node over
# ZeroMQ into `holdfast live`, twenty times as fast as it was driven. Closings and alarms appear as they happen, the
# summary at the end; the files lie in build/demo/. May be run again at once, and stopped with Ctrl-C.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

outing=replay_logs/demo
out=build/demo
pace=20

bash .ci/install.sh

log=$(mktemp)
node=
clean_up() {
    rm -f "$log"
    if [ -n "$node" ]; then kill "$node" 2>/dev/null || true; fi
}
trap clean_up EXIT
quietly() {
    "$@" >"$log" 2>&1 || {
        cat "$log" >&2
        echo "failed: $*" >&2
        exit 1
    }
}

echo "Building (the first time takes some minutes) ..."
quietly cmake --preset release -DHOLDFAST_TESTS=OFF
quietly cmake --build --preset release

mkdir -p "$out"
# Port *: any that is free; the node says which.
build/bin/carnode play "$outing/outing.hfr" --car "$outing/car.toml" --bind 'tcp://127.0.0.1:*' --pace "$pace" \
    >"$out/carnode.log" 2>&1 &
node=$!
endpoint=
for _ in $(seq 100); do
    endpoint=$(grep -om1 'tcp://127\.0\.0\.1:[0-9]*' "$out/carnode.log" || true)
    if [ -n "$endpoint" ] || ! kill -0 "$node" 2>/dev/null; then break; fi
    sleep 0.1
done
if [ -z "$endpoint" ]; then
    cat "$out/carnode.log" >&2
    echo "failed: carnode did not begin to send" >&2
    exit 1
fi

echo "A recorded outing of a simulated car, sent at $pace times its pace:"
echo
status=0
build/bin/holdfast live --from "$endpoint" --car "$outing/car.toml" --out "$out" || status=$?
if [ "$status" -ne 0 ] && [ "$status" -ne 3 ]; then exit "$status"; fi

cat <<END

In $out/:
  closures.csv    a row for each closing of the flap: how fast the downforce came back, and whether it was
                  there when the brakes came on
  estimates.csv   speed, downforce and drag areas, 50 times a second, with their uncertainties
  zones.csv       the closings by braking zone
  summary.json    the outing as a whole, and the health of each sensor
  report.html     all of it in pictures and tables, for any browser; open it by double click
The wall page shows the outing in a browser as it goes on; this serves it for the same outing until Ctrl-C:
  build/bin/holdfast replay $outing/outing.hfr --car $outing/car.toml --out $out --page 127.0.0.1:8080
README.md says what every column means, and how to bring a log of your own.
END
