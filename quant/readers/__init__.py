"""One file format, one file; the registry is a plain table."""
