"""The room's tables: CSV files that lie beside the code."""

import csv
from functools import cache
from importlib.resources import files

Rows = tuple[dict[str, str], ...]


@cache
def table_rows(name: str) -> Rows:
    """Return the rows of a table of this room, each by its headings.

    Parameters
    ----------
    name : str
        File name, such as "bands.csv".
    """
    text = files("quant.chemistry").joinpath(name).read_text("utf-8")
    return tuple(csv.DictReader(text.splitlines(), strict=True))


def plain_name(text: str) -> str:
    """Return letters and digits of a name in lower case, as names of substances and groups are compared.

    The signs of bonds count: C=C is not C≡C.

    >>> plain_name("N,N-Dimethylformamide"), plain_name("C=O ester")
    ('nndimethylformamide', 'c=oester')
    """
    return "".join(c for c in text.lower() if c.isalnum() or c in "=≡")
