"""One section, one file: what a section shows, as plain values for its template."""
