#!/usr/bin/env bash
# The ratio of one group of 6 lots of 8 pulls against statsmodels OLS on arrays, and that both give the same numbers.
# usage: examples/against_statsmodels.sh [PYTHON]   (a python 3 with numpy, scipy and statsmodels)
set -eu
cargo build --quiet --release --example group_of_lots
"${1:-python3}" "$(dirname "$0")/against_statsmodels.py" "${CARGO_TARGET_DIR:-target}/release/examples/group_of_lots"
