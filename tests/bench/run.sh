#!/usr/bin/env bash
# Runs the benchmark in its own environment (made on first use): bash tests/bench/run.sh [SCENARIO ...] [--quick] ...
# NEARCHORD_BENCH_PYTHON names a Python that has the `bench` extra already; then nothing is installed.
set -euo pipefail
root="$(cd "$(dirname "$0")/../.." && pwd)"
python="${NEARCHORD_BENCH_PYTHON:-}"
if [ -z "$python" ]; then
    environment="$root/.venv-bench"
    if [ ! -e "$environment/ready" ] || [ "$root/pyproject.toml" -nt "$environment/ready" ]; then
        python3 -m venv "$environment"
        "$environment/bin/python" -m pip install --quiet --editable "$root[bench]"
        touch "$environment/ready"
    fi
    python="$environment/bin/python"
fi
export PYTHONPATH="$root/client:$root/service:$root/tests${PYTHONPATH:+:$PYTHONPATH}"
exec "$python" -m bench "$@"
