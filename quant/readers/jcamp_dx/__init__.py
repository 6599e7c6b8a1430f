"""JCAMP-DX 4.24 and 5.01: labels, compressed ordinates, reader and writer."""
