#!/usr/bin/env bash
# Runs every fuzz function of every package for a while each: scripts/fuzz.sh 60s
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
time=${1:-60s}
go=${GO:-go}

# go test -list prints a package's functions, then "ok package seconds".
list=$("$go" test -list '^Fuzz' ./...)
targets=$(awk '/^Fuzz/ {n[++k] = $1} $1 == "ok" {for (i = 1; i <= k; i++) print $2, n[i]; k = 0}' <<<"$list")
if [ -z "$targets" ]; then
	echo "no fuzz function found" >&2
	exit 1
fi

log=$(mktemp)
trap 'rm -f "$log"' EXIT
fuzz() { "$go" test -run '^$' -fuzz "^$2\$" -fuzztime "$time" "$1" >"$log" 2>&1; }

while read -r package name; do
	echo "fuzz $package $name $time"
	if ! fuzz "$package" "$name"; then
		# At the end of its time the fuzzer can mistake its own deadline for a failure; it
		# then names no failing input. Only that case is tried again, once.
		if grep -q 'context deadline exceeded' "$log" && ! grep -q 'Failing input written' "$log" && fuzz "$package" "$name"; then
			:
		else
			cat "$log"
			exit 1
		fi
	fi
	tail -n 2 "$log"
done <<<"$targets"
