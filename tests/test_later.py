"""Entries are imported when they are asked for."""

import subprocess
import sys
from decimal import Decimal

import pytest

from quant.later import LaterTable, fetch, later
from quant.preprocessing.registry import CORRECTIONS, STEPS
from quant.regression.registry import METHODS

TABLE = LaterTable[type]({"decimal": "decimal:Decimal", "missing": "decimal:Nothing"})


def test_an_entry_is_what_it_names():
    assert TABLE["decimal"] is Decimal is fetch("decimal:Decimal")
    assert later("decimal:Decimal")("1.5") == Decimal("1.5")
    assert list(TABLE) == ["decimal", "missing"]
    assert len(TABLE | LaterTable({"other": "os:sep"})) == 3
    assert "missing" in TABLE
    assert "absent" not in TABLE
    with pytest.raises(KeyError):
        TABLE["absent"]
    with pytest.raises(AttributeError):
        TABLE["missing"]


def test_the_name_of_a_class():
    assert TABLE.name_of(Decimal) == "decimal"
    with pytest.raises(KeyError, match="builtins:int"):
        TABLE.name_of(int)


@pytest.mark.parametrize("table", [STEPS, CORRECTIONS, METHODS])
def test_every_entry_of_our_tables_is_there_and_is_named_back(table):
    assert [table.name_of(entry) for entry in table.values()] == list(table)


def test_a_table_imports_one_entry_only():
    code = (
        "import sys; from quant.preprocessing.registry import STEPS; STEPS['snv']; "
        "sys.exit(not ('quant.preprocessing.snv' in sys.modules and 'quant.preprocessing.msc' not in sys.modules))"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
