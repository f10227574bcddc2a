#!/bin/sh
# Writes the tables of fit/STUDY.md anew: each between <!-- NAME --> and
# <!-- end NAME -->, from the rows that a test logs. Takes half an hour.
# usage: testdata/study.sh [GO TEST FLAGS]
set -eu
cd "$(dirname "$0")/.."
doc=fit/STUDY.md

# table NAME VARIABLE=VALUE TEST PACKAGE: runs the test and puts its rows in place.
table() {
  name=$1 setting=$2 test=$3 package=$4
  shift 4
  out=$(mktemp)
  echo "study: $setting go test -run '^$test\$' $package"
  env "$setting" go test "$@" -count=1 -timeout 2h -v -run "^$test\$" "$package" >"$out" || { grep -v '^=== ' "$out"; exit 1; }
  {
    echo "\`$setting go test -v -run '^$test\$' $package\`, $(date +%Y-%m-%d)"
    echo
    sed -n 's/^ *[a-z_]*_test\.go:[0-9]*: \(| .*\)$/\1/p' "$out" |
      awk '{ print } NR == 1 { gsub(/[^|]+/, "---"); print }'
  } >"$out.rows"
  awk -v name="$name" -v rows="$out.rows" '
    $0 == "<!-- " name " -->" { print; print ""; while ((getline line < rows) > 0) print line; print ""; skip = 1 }
    $0 == "<!-- end " name " -->" { skip = 0 }
    !skip { print }' "$doc" >"$out.doc"
  cat "$out.doc" >"$doc"
  rm -f "$out" "$out.rows" "$out.doc"
}

table efficiency DRAWS=500 TestEstimatesAreEfficient ./fit "$@"
table worlds STUDY=16 TestWorlds ./cmd/standoff "$@"
table rooms ROOMS=100 TestRooms ./cmd/standoff "$@"
table plan PLAN=40 TestPlanForeseesTheScatter ./cmd/standoff "$@"
table source SOURCE=8 TestSourceIsMeasured ./cmd/standoff "$@"
