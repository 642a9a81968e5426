"""The wire: servicers, conversion between protobuf and the model, limits. The only room that knows gRPC."""
