#!/usr/bin/env bash
# Runs the test suite: bash tests/run.sh [--faults] [PYTEST ARGUMENT ...]
# Makes .venv and installs the test extra when needed; needs only bash and python3 (3.11 or later, with venv).
# --faults repeats every test that kills processes ten times; without it each of them runs once.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

export NEARCHORD_FAULT_ROUNDS="${NEARCHORD_FAULT_ROUNDS:-1}"
if [[ "${1:-}" == --faults ]]; then
  shift
  export NEARCHORD_FAULT_ROUNDS=10
fi

. deploy/install.sh
install_into .venv test

exec .venv/bin/python -m pytest "$@"
