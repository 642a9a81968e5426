"""Durable state: jobs, events, answers and content behind one port."""
