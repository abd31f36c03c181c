#!/usr/bin/env bash
# The sweep of the command rate against the same work in NumPy and SciPy, in one run: 1000 rates under seven maps of a loop
# of order six. Each is timed three times, in turn; the least of each counts.
#
#     scripts/speed.sh
set -euo pipefail
cd "$(dirname "$0")/.."
python=${PYTHON:-/usr/bin/python3}
go=${GO:-go}
cores=$(nproc) # before the next line, which it heeds
export OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1   # small matrices: threads only get in each other's way
if ! "$python" -c 'import numpy, scipy' 2>/dev/null; then
  echo "speed: $python lacks NumPy or SciPy; scripts/install-check-tools.sh installs them" >&2
  exit 2
fi
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
"$go" test -c -o "$work/study.test" ./study
for i in 1 2 3; do
  (cd study && "$work/study.test" -test.run '^$' -test.bench '^BenchmarkSweep$' -test.benchtime 1x) |
    awk '/^BenchmarkSweep/ {printf "%.3f\n", $3/1e9}' >>"$work/program"
  "$python" testdata/speed/sweep.py --jobs 1 >>"$work/one"
  "$python" testdata/speed/sweep.py --jobs "$cores" >>"$work/all"
done
awk -v cores="$cores" '
  FNR == 1 {file++}
  {if (!(file in least) || $1 < least[file]) least[file] = $1}
  END {
    printf "program, %d cores:                 %7.2f s\n", cores, least[1]
    printf "NumPy and SciPy, one process:     %7.2f s, %5.1f times as long\n", least[2], least[2]/least[1]
    printf "NumPy and SciPy, %d processes:     %7.2f s, %5.1f times as long\n", cores, least[3], least[3]/least[1]
  }' "$work/program" "$work/one" "$work/all"
