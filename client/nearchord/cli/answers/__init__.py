"""What only answers of one kind have: keys of their own in JSON, and lines and tables for people."""
