"""Numbers of the monitor's cells as kernels use them (compile-time constants), and their poll period."""

STOP = 0
STEP = 2
FILL = 4
BAGS_DONE = 6

POLL = 16383  # a loop over vertices looks at STOP whenever (index & POLL) == 0
