#!/usr/bin/env bash
# Installs the tools that make check needs and that are missing, with apt-get.
#
#   scripts/install-check-tools.sh          all of them
#   scripts/install-check-tools.sh npm ...  the named ones
#
# Does nothing, and needs no rights, when they are all there. Uses sudo when not root.
set -euo pipefail

all=(npm cc chromium mpmath scipy)

present() {
	case $1 in
	npm) command -v npm ;;
	cc) command -v cc && echo '#include <stdlib.h>' | cc -E -x c - ;; # the race detector links through it
	chromium) command -v chromium ;;
	mpmath) /usr/bin/python3 -c 'import mpmath' ;;
	scipy) /usr/bin/python3 -c 'import scipy' ;;
	esac >/dev/null
}

packages() {
	case $1 in
	npm) echo nodejs npm ;;
	cc) echo gcc libc6-dev ;;
	chromium) echo chromium ;;
	mpmath) echo python3-mpmath ;;
	scipy) echo python3-scipy ;;
	esac
}

missing=() install=()
[ $# -gt 0 ] || set -- "${all[@]}"
for tool in "$@"; do
	if [ -z "$(packages "$tool")" ]; then
		echo "$0: no tool is called $tool; there are: ${all[*]}" >&2
		exit 2
	fi
	if ! present "$tool" 2>/dev/null; then
		missing+=("$tool")
		read -ra names <<<"$(packages "$tool")"
		install+=("${names[@]}")
	fi
done
[ ${#missing[@]} -eq 0 ] && exit 0

echo "missing: ${missing[*]}; Debian packages: ${install[*]}" >&2
if ! command -v apt-get >/dev/null 2>&1; then
	echo "$0: there is no apt-get here: install the equivalents of these packages by hand, then run make again" >&2
	exit 1
fi
root=()
if [ "$(id -u)" -ne 0 ]; then
	if ! command -v sudo >/dev/null 2>&1; then
		echo "$0: not root and no sudo: have somebody run: apt-get install ${install[*]}" >&2
		exit 1
	fi
	root=(sudo)
fi
quiet=("${root[@]}" env DEBIAN_FRONTEND=noninteractive)
"${quiet[@]}" apt-get update -q </dev/null
"${quiet[@]}" apt-get install -q -y --no-install-recommends "${install[@]}" </dev/null

for tool in "${missing[@]}"; do
	if ! present "$tool" 2>/dev/null; then
		echo "$0: $tool is still missing after the installation" >&2
		exit 1
	fi
done
