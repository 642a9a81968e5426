"""The service: a durable queue of graph questions, the workers that answer them, and their wire."""
