"""The two files of a report."""

import json

from quant.reports.write import report_json, write_report


def paths(value: object, at: str = "") -> set[str]:
    """Every key of a JSON value by its path, entries of lists as []."""
    if isinstance(value, dict):
        found = set()
        for key, entry in value.items():
            place = f"{at}.{key}" if at else key
            found |= {place} | paths(entry, place)
        return found
    if isinstance(value, list):
        return {path for entry in value for path in paths(entry, f"{at}[]")}
    return set()


def named(path: str, keys: dict[str, str]) -> bool:
    """Whether a path is documented; the names below a mapping are data, not keys."""
    mappings = (
        "analytes[].cross_validation.choices",
        "analytes[].audit.uncertainty.budget.shares",
        "provenance[].domain",
        "provenance[].versions",
        "keys",
    )
    if path.startswith(tuple(f"{mapping}." for mapping in mappings)):
        return True
    head, found, tail = path.partition("by_origin.")
    if found:
        _, _, rest = tail.partition(".")
        path = f"{head}by_origin.*.{rest}" if rest else f"{head}by_origin"
    return path in keys


def test_page_and_numbers_stand_side_by_side(pls, tmp_path):
    written = write_report(pls, tmp_path / "new" / "folder")
    assert sorted(path.name for path in (tmp_path / "new" / "folder").iterdir()) == ["calibration.json", "report.html"]
    assert written.html.read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    first = written.html.read_bytes(), written.json.read_bytes()
    again = write_report(pls, tmp_path / "new" / "folder")
    assert (again.html.read_bytes(), again.json.read_bytes()) == first


def test_the_numbers_are_the_result_and_come_back(pls):
    record = json.loads(report_json(pls))
    result = pls.to_dict()
    assert {key: record[key] for key in result} == result
    assert set(record) - set(result) == {"provenance", "keys"}
    assert record["analytes"][0]["validation"]["predicted"] == pls.analytes[0].validation.predicted.tolist()
    assert record["provenance"][0]["training"] == [
        {"name": "paste.csv", "size": 1234, "sha256": "0123456789abcdef" * 4}
    ]


def test_every_key_is_documented(pls, band, unvalidated, audited, chemical):
    for result in (pls, band, unvalidated, audited, chemical):
        record = json.loads(report_json(result))
        keys = record["keys"]
        assert {path for path in paths(record) if not named(path, keys)} == set()
        assert all(keys.values())


def test_every_documented_key_exists(pls, make, audited, undecided, chemical):
    results = (pls, make(repeats=True), audited, undecided, chemical)
    records = [json.loads(report_json(result)) for result in results]
    existing = {path.replace("by_origin.spiked", "by_origin.*") for record in records for path in paths(record)}
    assert set(records[0]["keys"]) - existing == set()
