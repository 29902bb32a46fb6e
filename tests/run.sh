#!/bin/sh
# Everything the tests need, then the tests.
#   sh tests/run.sh             the tests
#   sh tests/run.sh check       format, lint, types, tests; nothing may be left out
#   sh tests/run.sh browser     the tests that click through the report in a browser
#   sh tests/run.sh thorough    the tests, calibration and all property examples
#   sh tests/run.sh benchmark   speed, as ratios within one run
#   sh tests/run.sh refresh     sample runs, generated lists, key reference, schema
set -u
. "$(dirname -- "$0")/../generator/setup.sh"
cd "$root" || exit 1
word=${1:-tests}
[ $# -gt 0 ] && shift
# two processes are quicker on two cores; one BLAS thread in each keeps them from waiting for each other
export OPENBLAS_NUM_THREADS=1 OMP_NUM_THREADS=1

run_tests() { "$python" -m pytest -q -n 2 --dist loadfile --ignore=tests/benchmark --ignore=tests/browser "$@"; }

missing() {  # name what can't be run here; under `check` that is a failure
    lacking=""
    have_pango || lacking="$lacking PDF:Pango"
    command -v qpdf >/dev/null 2>&1 || debian qpdf || lacking="$lacking PDF:qpdf"
    command -v chromium >/dev/null 2>&1 || [ "$1" != browser ] || debian chromium || lacking="$lacking browser:chromium"
    [ -z "$lacking" ] && return 0
    say "Not run here, for want of a program:$lacking"
    [ "$1" = tests ]
}

case "$word" in
    tests) run_tests "$@"; code=$?; missing tests; exit $code ;;
    check)
        missing check || exit 1
        "$python" -m ruff format --check --quiet . || { say "not formatted: $python -m ruff format ."; exit 1; }
        "$python" -m ruff check --quiet . || exit 1
        "$python" -m mypy || exit 1
        run_tests "$@" ;;
    browser) missing browser || exit 1; run_tests tests/browser "$@" ;;
    thorough) BEFOREHAND_THOROUGH=1 run_tests "$@" ;;
    benchmark) exec "$python" -m pytest -q -s tests/benchmark "$@" ;;
    refresh) exec "$python" tests/refresh.py "$@" ;;
    *) say "sh tests/run.sh knows: tests, check, browser, thorough, benchmark, refresh"; exit 2 ;;
esac
