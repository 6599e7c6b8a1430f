"""One section, one file; a self-contained HTML page."""
