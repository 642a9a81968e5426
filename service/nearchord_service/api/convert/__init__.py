"""The only place where protobuf meets the model: requests become checked values here, values become responses."""
