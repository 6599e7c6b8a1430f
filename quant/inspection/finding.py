"""One finding: how grave, what, who, why, and what to do."""

import textwrap
from dataclasses import dataclass

from quant.checks import name_some
from quant.result import Result, documented

STOP, DOUBT, NOTE = "stop", "doubt", "note"

GRAVITIES = {
    STOP: "a calibration from this would be wrong",
    DOUBT: "look before you go on",
    NOTE: "worth knowing",
}
"""Gravities, the gravest first, and what they mean."""

WIDTH = 110  # of printed findings, characters


@dataclass(frozen=True, kw_only=True)
class Finding(Result):
    """Something that the look over spectra and values found."""

    gravity: str = documented("stop (a calibration from this would be wrong), doubt (look before you go on), or note")
    code: str = documented("Short name of the kind of finding, the same in every version")
    title: str = documented("What was found, in one line")
    samples: tuple[str, ...] = documented("Samples concerned (or pairs 'A = B', or files), the worst first")
    evidence: str = documented("The numbers behind it")
    advice: str = documented("What to do; empty where there is nothing to do")

    def __str__(self) -> str:
        """Gravity and title, then the samples (at most five by name), the evidence and the advice."""
        lines = [self.title]
        if self.samples:
            lines.append(f"{name_some(self.samples)}.")
        lines += [self.evidence, f"→ {self.advice}" if self.advice else ""]
        indent = " " * 7
        first, *rest = (textwrap.wrap(line, WIDTH - 7) for line in lines if line)
        blocks = [first, *rest]
        text = "\n".join(indent + line for block in blocks for line in block)
        return self.gravity.ljust(7) + text[7:]


def by_gravity(findings: list[Finding]) -> tuple[Finding, ...]:
    """Return the findings, the gravest first, otherwise in their own order."""
    order = list(GRAVITIES)
    return tuple(sorted(findings, key=lambda finding: order.index(finding.gravity)))


def plural(count: int, noun: str, several: str = "") -> str:
    """Return a count with its noun: "1 spectrum", "2 spectra".

    >>> plural(1, "pair"), plural(3, "spectrum", "spectra")
    ('1 pair', '3 spectra')
    """
    return f"{count} {noun if count == 1 else several or noun + 's'}"


def percent(share: float) -> str:
    r"""Return a share in percent, without decimals; no line breaks before the sign.

    >>> percent(0.02)
    '2\xa0%'
    """
    return f"{100 * share:.0f}\N{NO-BREAK SPACE}%"


def signed_percent(share: float) -> str:
    r"""Return a share in percent with its sign.

    >>> signed_percent(-0.26), signed_percent(0.5)
    ('-26\xa0%', '+50\xa0%')
    """
    return f"{100 * share:+.0f}\N{NO-BREAK SPACE}%"
