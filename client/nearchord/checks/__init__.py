"""What the checker confirms, question by question, from graphs and definitions. No code is shared with the solver."""
