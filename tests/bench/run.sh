#!/usr/bin/env bash
# Runs the benchmark: bash tests/bench/run.sh [SCENARIO ...] [--quick] [--profile] [--help]
# Makes .venv-bench with the bench extra when needed (its solvers hold protobuf to other releases than the service
# alone would get). NEARCHORD_BENCH_PYTHON names a Python that has the extra already; then nothing is installed.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/../.."

if [[ -z "${NEARCHORD_BENCH_PYTHON:-}" ]]; then
  . deploy/install.sh
  install_into .venv-bench bench
fi

export PYTHONPATH="$PWD/client:$PWD/service:$PWD/tests${PYTHONPATH:+:$PYTHONPATH}"
exec "${NEARCHORD_BENCH_PYTHON:-.venv-bench/bin/python}" -m bench "$@"
