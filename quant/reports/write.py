"""Writing a report: one page to read, one file of numbers beside it."""

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from quant.calibration.result import AnalyteResult, CalibrationResult
from quant.files import write_text
from quant.inspection.inspect import InspectionResult
from quant.reports.inspection_page import inspection_json, render_inspection
from quant.reports.keys import key_docs
from quant.reports.page import render_page
from quant.reports.revalidation_page import render_revalidation, revalidation_json
from quant.result import Result, documented, jsonable
from quant.revalidation.history import ControlChart
from quant.revalidation.result import RevalidationResult


@dataclass(frozen=True)
class ReportPaths:
    """Where a report was written."""

    html: Path
    json: Path


@dataclass(frozen=True, kw_only=True)
class TrainingFile(Result):
    """A file that a calibration was made from."""

    name: str = documented("File name")
    size: int = documented("Size", "bytes")
    sha256: str = documented("SHA-256 of its content")


@dataclass(frozen=True, kw_only=True)
class Provenance(Result):
    """How one analyte's model came about."""

    analyte: str = documented("Name of the analyte")
    state: str = documented("State of the model: draft, approved, provisional or retired")
    domain: dict[str, tuple[str, ...]] = documented("Acquisition notes of the calibration's spectra, and their values")
    training: tuple[TrainingFile, ...] = documented("Files it was made from")
    versions: dict[str, str] = documented("Versions of the programs that made it")


def write_report(result: CalibrationResult, folder: str | Path) -> ReportPaths:
    """Write `report.html` and `calibration.json`.

    The page stands alone: pictures and style are inside, nothing is loaded, nothing runs. The same result gives the
    same bytes.

    Parameters
    ----------
    result : CalibrationResult
    folder : str or Path
        Made where it does not exist; files of the same names are replaced.

    Returns
    -------
    ReportPaths
    """
    paths = ReportPaths(Path(folder) / "report.html", Path(folder) / "calibration.json")
    page, numbers = render_page(result), report_json(result)
    write_text(paths.html, page)
    write_text(paths.json, numbers)
    return paths


def write_inspection(result: InspectionResult, folder: str | Path) -> ReportPaths:
    """Write `inspection.html` and `inspection.json`, as `write_report` writes those of a calibration."""
    paths = ReportPaths(Path(folder) / "inspection.html", Path(folder) / "inspection.json")
    page, numbers = render_inspection(result), inspection_json(result)
    write_text(paths.html, page)
    write_text(paths.json, numbers)
    return paths


def write_revalidation(
    result: RevalidationResult, folder: str | Path, history: ControlChart | None = None
) -> ReportPaths:
    """Write `revalidation.html` and `revalidation.json`, as `write_report` writes those of a calibration.

    Parameters
    ----------
    result : RevalidationResult
    folder : str or Path
    history : ControlChart, optional
        The check sample over the months.
    """
    paths = ReportPaths(Path(folder) / "revalidation.html", Path(folder) / "revalidation.json")
    page, numbers = render_revalidation(result, history), revalidation_json(result, history)
    write_text(paths.html, page)
    write_text(paths.json, numbers)
    return paths


def report_json(result: CalibrationResult) -> str:
    """Return everything as JSON text: the result, where its models came from, and under "keys" what each key means."""
    record: dict[str, Any] = {
        **result.to_dict(),
        "provenance": jsonable([_provenance(analyte) for analyte in result.analytes]),
        "keys": {
            **key_docs(type(result)),
            "provenance": "Where the models came from, one entry an analyte",
            **{f"provenance[].{path}": doc for path, doc in key_docs(Provenance).items()},
            "keys": "What each key means; [] stands for an entry of a list, * for a name",
        },
    }
    return json.dumps(record, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def _provenance(result: AnalyteResult) -> Provenance:
    model = result.model
    return Provenance(
        analyte=result.analyte,
        state=str(model.state),
        domain=dict(model.domain),
        training=tuple(TrainingFile(name=s.name, size=s.size, sha256=s.sha256) for s in model.training),
        versions=dict(model.versions),
    )
