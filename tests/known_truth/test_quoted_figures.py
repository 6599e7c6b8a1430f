"""The README quotes what the long tests counted."""

import json
from collections import Counter


def test_the_readme_quotes_the_counts_of_the_long_tests(repository):
    found = json.loads((repository / "tests" / "long" / "results.json").read_text("utf-8"))
    coverage = found["coverage"]
    rows = [
        (
            "95 % interval holds a new reference result (36 standards, one new sample a set)",
            *("covered", "sets", coverage),
        ),
        ("95 % interval holds the true value", "covered_true", "true_intervals", coverage),
    ]
    for n in (30, 60):
        counts = found[f"applicability_{n}"]
        foreign = counts["foreign_rejected"]
        totals = {**counts, "all_foreign": sum(foreign.values()), "asked": counts["foreign_a_kind"] * len(foreign)}
        rows.append((f'new in-domain samples called "not applicable", {n} standards', "rejected", "new", totals))
        rows.append(
            (f'spectra of five foreign kinds called "not applicable", {n} standards', "all_foreign", "asked", totals)
        )
    labels = found["exchanged_labels"]
    pair = "exchanged pair of labels (values a third of the range apart or more) named first"
    rows.append((pair, "named_first", "sets", labels))
    rows.append(("clean sets in which a pair is suspected (nominal 2 %)", "alarms", "clean_sets", labels))
    readme = (repository / "README.md").read_text("utf-8")
    for claim, part, whole, counts in rows:
        assert f"| {claim} | {counts[part]} of {counts[whole]} |" in readme


def test_the_readme_quotes_the_table_of_visits(repository):
    found = json.loads((repository / "tests" / "long" / "results.json").read_text("utf-8"))
    visits = {name.removeprefix("visit: "): counts for name, counts in found.items() if name.startswith("visit: ")}
    readme = (repository / "README.md").read_text("utf-8")
    shown = (
        *("broken", "named", "wrongly holds", "called broken"),
        *("mendable", "mendable, restored", "beyond mending", "beyond mending, rebuild"),
    )
    assert len(visits) > 20
    for name, counts in visits.items():
        assert counts["visits"] == 200
        assert f"| {name} | {' | '.join(str(counts[key]) for key in shown)} |" in readme
    total = Counter()
    for counts in visits.values():
        total.update({key: counts[key] for key in shown})
    assert f"| all | {' | '.join(str(total[key]) for key in shown)} |" in readme
    assert total["wrongly holds"] <= 0.05 * total["broken"]
    assert total["named"] >= 0.9 * total["broken"]
    restored = 100 * total["mendable, restored"] / total["mendable"]
    assert f"{restored:.0f} % of all visits that can be mended" in readme
    assert total["beyond mending, rebuild"] >= 0.9 * total["beyond mending"]
    assert visits["nothing"]["called broken"] <= 10  # 5 %
