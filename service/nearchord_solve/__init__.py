"""The pure solver: arrays in, answers out."""
