#!/bin/sh
# Runs a study over tolerances in parts, a few at a time, and joins them: spread.json and spread.html.
#
#   scripts/spread-parts.sh LOOPFILE PARTS [flags of spread, such as --trials 1e6]
#
# AT_ONCE is how many run at the same time (4 if not given). A part uses all processors of its machine, so put another
# command before steadytick where parts are to run elsewhere: RUN='ssh node' or a batch system's "run and wait".
set -eu
loop=$1 parts=$2
shift 2
folder=${FOLDER:-spread-parts}
mkdir -p "$folder"
i=1
while [ "$i" -le "$parts" ]; do
	echo "$i"
	i=$((i + 1))
done | xargs -P "${AT_ONCE:-4}" -I PART ${RUN:-} steadytick spread "$loop" "$@" --shard "PART/$parts" --out "$folder/PART.jsonl"
steadytick spread --merge "$folder"/*.jsonl "$loop" --json spread.json --html spread.html
