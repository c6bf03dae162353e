#!/bin/sh
# Times the solver against general-purpose libraries (lfilter.py) on this machine
# in one run, and prints the rate of every benchmark and its ratio to theirs, one
# core each. Both take turns, and the fastest of all turns counts on both sides.
#
#   testdata/bench/compare.sh [TURNS] [BENCHMARKS]
#
# PYTHON names a Python with NumPy and SciPy.
set -eu
cd "$(dirname "$0")/../.."
turns=${1:-3}
benchmarks=${2:-SD|Forms|RotD}
python=${PYTHON:-python3}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT

go test -c -o "$work/spectrum.test" ./pipeline/spectrum
turn=0
while [ "$turn" -lt "$turns" ]; do
  turn=$((turn + 1))
  echo "libraries $("$python" testdata/bench/lfilter.py)" >>"$work/results"
  GOMAXPROCS=1 "$work/spectrum.test" -test.run '^$' -test.bench "$benchmarks" -test.benchtime 200ms >>"$work/results" || {
    cat "$work/results" >&2
    exit 1
  }
done

awk '
  $1 == "cpu:" { cpu = $0 }
  $1 == "libraries" && $2 + 0 > base { base = $2 + 0 }
  /^Benchmark/ {
    for (i = 3; i < NF; i++) if ($(i + 1) == "osc-steps/s") {
      name = $1; sub(/^Benchmark/, "", name)
      if (!(name in best)) order[++n] = name
      if ($i + 0 > best[name]) best[name] = $i + 0
    }
  }
  END {
    if (n == 0) { print "no benchmark reports osc-steps/s"; exit 1 }
    print cpu
    printf "%-40s %18s %8s\n", "10^9 oscillator-steps/s, one core", "rate", "ratio"
    printf "%-40s %18.3f %8.1f\n", "SciPy lfilter and NumPy max", base / 1e9, 1
    for (i = 1; i <= n; i++) printf "%-40s %18.3f %8.1f\n", order[i], best[order[i]] / 1e9, best[order[i]] / base
  }' "$work/results"
