"""What the service is about in plain values: jobs, stages, verdicts, events, answers, errors. Standard library only."""
