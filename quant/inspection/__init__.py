"""What was read, how it pairs, and what is wrong with it."""
