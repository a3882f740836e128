#!/bin/sh
# Gates a pipeline on the design rules of every rail.
#
#   sh check-rails.sh RAILS FINDINGS
#
# RAILS holds one directory per rail with a rule-checks.json in it; FINDINGS takes a
# table and a SARIF 2.1.0 log for each. Exit code: 0 every rail passes, 1 a rail
# fails, 4 none fails but one is incomplete, otherwise that of railproof.
set -u
rails=$1
findings=$2
mkdir -p "$findings" || exit 3
verdict=0
for request in "$rails"/*/rule-checks.json; do
  rail=$(basename "$(dirname "$request")")
  railproof check --table --sarif "$findings/$rail.sarif" "$request" >"$findings/$rail.txt"
  code=$?
  head -n 2 "$findings/$rail.txt"
  case $code in
    0) ;;
    4) [ "$verdict" -eq 0 ] && verdict=4 ;;
    1) verdict=1 ;;
    *) exit "$code" ;;
  esac
done
exit "$verdict"
