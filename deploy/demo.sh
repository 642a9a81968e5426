#!/usr/bin/env bash
# Shows nearchord at work: bash deploy/demo.sh [OPTION OF `nearchord demo` ...]
# Makes .venv and installs the command line and the service when needed, then starts a private service on a free
# loopback port, has it solve the graphs in deploy/demo/graphs and checks every answer. Exits 0 when all are confirmed.
# Needs only bash and python3 (3.11 or later, with venv).
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

. deploy/install.sh
install_into .venv cli,service

exec .venv/bin/nearchord demo --graphs deploy/demo/graphs "$@"
