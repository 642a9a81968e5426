"""Talking to a service: an I/O-free core under two thin shells.

The core (`flows_*`, `requests`, `replies`, `status`, `retry`) never touches a channel. Its flows are generators that
yield *steps* (`steps.py`): "make this call", "give me the next message", "pause", "hand this to the caller". The
shells `sync` and `aio` carry the steps out on the two gRPC stacks and hand results, or errors, back in.
"""
