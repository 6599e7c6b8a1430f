"""Whether a file is JCAMP-DX: told without loading the decoder."""

SUFFIXES = (".dx", ".jdx", ".jcm")


def recognises_jcamp_dx(head: bytes, file_name: str) -> bool:
    """Tell whether a file begins with a label, or has a name that JCAMP-DX files have. Never raises."""
    start = head.removeprefix(b"\xef\xbb\xbf").replace(b"\x00", b"").lstrip(b"\xff\xfe \t\r\n")
    return start.startswith(b"##") or file_name.lower().endswith(SUFFIXES)
