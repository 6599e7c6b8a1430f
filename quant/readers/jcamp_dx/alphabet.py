"""The characters of an ordinate table: pseudo-digits, and tables that say at once what each byte is.

References
----------
.. [1] McDonald R.S., Wilks P.A., Appl. Spectrosc. 42 (1988) 151-162, tables of pseudo-digits (from memory; the worked
   lines in the tests name their source).
"""

SQZ_PLUS, SQZ_MINUS = "@ABCDEFGHI", "\0abcdefghi"
DIF_PLUS, DIF_MINUS = "%JKLMNOPQR", "\0jklmnopqr"
DUP = "\0STUVWXYZs"
MISSING_MARK = "?"
PLUS, MINUS = ord("+"), ord("-")

BLANK, LINE_END, MISSING, POINT, DIGIT, VALUE, DIFFERENCE, REPEAT = range(8)
"""Kinds of characters. From MISSING on they belong to a token, from POINT on a digit behind them goes on with it."""

_LEADING = (
    ("0123456789", DIGIT, 1),
    (SQZ_PLUS, VALUE, 1),
    (SQZ_MINUS, VALUE, -1),
    (DIF_PLUS, DIFFERENCE, 1),
    (DIF_MINUS, DIFFERENCE, -1),
    (DUP, REPEAT, 1),
)


def _tables() -> tuple[bytes, bytes, bytes, bytes]:
    kinds, digits, leading, signs = (bytearray([fill]) * 256 for fill in (255, 255, 0, 1))
    for characters, kind in ((" \t,;", BLANK), ("\n", LINE_END), (MISSING_MARK, MISSING), (".", POINT), ("+-", VALUE)):
        for character in characters:
            kinds[ord(character)] = kind
    for characters, kind, sign in _LEADING:
        for value, character in enumerate(characters):
            if character != "\0":
                kinds[ord(character)], leading[ord(character)], signs[ord(character)] = kind, value, sign % 256
    signs[MINUS] = 255
    digits[ord("0") : ord("9") + 1] = range(10)
    return bytes(kinds), bytes(digits), bytes(leading), bytes(signs)


KINDS, DIGITS, LEADING, SIGNS = _tables()
"""For `bytes.translate`: kind (255: none), digit (255: none), leading digit of a token, sign of its number (int8)."""

TOKEN_KINDS = bytes(VALUE if kind in (DIGIT, POINT) else kind for kind in KINDS)
"""For `bytes.translate`: what a token is that begins with the byte; a plain number is a value."""
