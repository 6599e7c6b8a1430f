"""One command, one file, each a thin door."""
