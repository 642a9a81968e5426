"""From the queue to the workers and back: leases, expiry, retention."""
