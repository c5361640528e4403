#!/bin/sh
# Makes the reference values of fixtures/reference again with R and Python (numpy, scipy), where they are installed.
# Writes over the committed files: look at `git diff --stat fixtures/reference` afterwards. Differences in the last
# digits come from other library versions; anything larger needs an explanation before it is committed.
# nist.json is certified data: its script runs only with GSL_SOURCE set (see scripts/nist.py).
set -eu
cd "$(dirname "$0")/../fixtures/reference"
WORK="$(mktemp -d)"
export WORK PYTHONPATH=scripts PYTHONDONTWRITEBYTECODE=1
trap 'rm -rf "$WORK"' EXIT

python=$(command -v python3 || true)
rscript=$(command -v Rscript || true)
if [ -n "$python" ] && ! "$python" -c 'import numpy, scipy' 2>/dev/null; then
  echo "python3 lacks numpy or scipy: Python references left alone"; python=
fi
if [ -n "$rscript" ] && ! "$rscript" -e 'library(jsonlite)' >/dev/null 2>&1; then
  echo "R lacks jsonlite: R references left alone"; rscript=
fi

if [ -n "$python" ]; then
  for script in harris bicoherence compression bootstrap library-values idle onOff oscillation stiction tuning twoDegreeOfFreedom; do echo "== $script.py"; "$python" "scripts/$script.py"; done
  if [ -n "${GSL_SOURCE:-}" ]; then echo "== nist.py"; "$python" scripts/nist.py; fi
else
  echo "no python3 with numpy and scipy"
fi
if [ -n "$rscript" ]; then
  echo "== r-correlation.R"; "$rscript" scripts/r-correlation.R
  echo "== tuning.margins.R (a check: it prints the largest differences)"; "$rscript" scripts/tuning.margins.R
  echo "== autoregression.R"; "$rscript" scripts/autoregression.R
  if [ -n "$python" ]; then
    echo "== autoregression.py"; "$python" scripts/autoregression.py
    echo "== harris-check.R"; "$rscript" scripts/harris-check.R
  fi
else
  echo "no Rscript with jsonlite"
fi
