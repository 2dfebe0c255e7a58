#!/usr/bin/env bash
# npm test [-- arguments of vitest]. The last line says what came out, whatever happened: "N passed, N failed".
set -uo pipefail
cd "$(dirname "$0")/.."
. .setup/prepare.sh

results=$(mktemp -d)
passed=0
failed=0
check=
finish() {
  local code=$?
  # It still runs where the build failed.
  [ -z "$check" ] || kill "$check" 2>/dev/null
  rm -rf "$results"
  # Ended early (a build that fails, an interruption): that is a failure, too.
  [ "$code" -eq 0 ] || [ "$failed" -gt 0 ] || failed=1
  say "$passed passed, $failed failed"
  [ "$failed" -eq 0 ] || exit 1
}
trap finish EXIT

# The settings of a shop are not those of its tests.
unset HOST PORT DATABASE_URL REFETTLE_DATA REFETTLE_DEMO REFETTLE_PUBLIC_URL REFETTLE_SERVER REFETTLE_HOME

# Beside the build, which keeps one core busy, and the tests, which wait for browsers and timers.
beside_build() {
  say 'Checking types and rules beside the tests …'
  node --single-threaded-gc --max-semi-space-size=128 .setup/check.js >"$results/check" 2>&1 </dev/null 8<&- &
  check=$!
}
prepare postgresql chromium-headless-shell socat poppler-utils

code=0
REFETTLE_TEST_WEB=$PWD/dist/web REFETTLE_TEST_PROGRAM=$PWD/dist/cli/main.js REFETTLE_TEST_COUNT=$results/count node_modules/.bin/vitest run --reporter=default --reporter=./tests/helpers/count-reporter.ts "$@" </dev/null || code=$?
read -r passed tests_failed <"$results/count" || { passed=0; tests_failed=1; }
# Vitest fails for other reasons than a test, too (a set-up, an error that nobody awaited): none of them may look like a success.
[ "$code" -eq 0 ] || [ "$tests_failed" -gt 0 ] || tests_failed=1
failed=$((failed + tests_failed))
# Its exit code: how many of the two are broken.
wait "$check" || { failed=$((failed + $?)); cat "$results/check"; }
