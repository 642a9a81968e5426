"""Generated protobuf and gRPC stubs of the contract in `proto/nearchord/v1`; regenerate, never edit."""
