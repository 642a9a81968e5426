#!/usr/bin/env bash
# Regenerates the committed stubs in client/nearchord/v1 from the contract beside this script.
# Needs grpcio-tools at the oldest supported release (the `lint` extra pins it): PYTHON=... names the interpreter.
set -euo pipefail
cd "$(dirname "$0")"
"${PYTHON:-python3}" -m grpc_tools.protoc -I . \
  --python_out=../client --pyi_out=../client --grpc_python_out=../client nearchord/v1/*.proto
cp nearchord/v1/service_config.json ../client/nearchord/v1/service_config.json
