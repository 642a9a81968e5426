"""Where solves run: executors behind one port, and the runner that calls the solver."""
