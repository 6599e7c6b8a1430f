"""What lies in the project: the top level as planned, and nothing that holds on one machine only.

Files are judged as git would: what .gitignore names is left out. That is worked out here, so that the tests also run
where git is missing or distrusts the folder's owner.
"""

import fnmatch
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

TOP_LEVEL = {"README.md", "DEVELOPERS.md", "pyproject.toml", "quant", "configs", "tests", "demo_sets"}
# The home, work and scratch folders of some machine, in the ways of Unix and of Windows. Parts of longer names
# (of an address, say) are left out.
MACHINE_PATH = re.compile(
    r"(?<![\w.~-])/(?:home|root|Users|work|tmp|mnt|var/folders)/\w|(?<!\w)[A-Za-z]:\\{1,2}(?:Users|Windows|Temp)\b"
)


def project_files(top: Path) -> Iterator[Path]:
    """Yield every file that git would keep, by its path from the top."""
    patterns = [line for line in (top / ".gitignore").read_text(encoding="utf-8").split() if not line.startswith("#")]
    waiting = [top]
    while waiting:
        for entry in sorted(waiting.pop().iterdir()):
            path = entry.relative_to(top).as_posix()
            if path == ".git" or any(ignores(pattern, path, entry.is_dir()) for pattern in patterns):
                continue
            if entry.is_dir():
                waiting.append(entry)
            else:
                yield Path(path)


def ignores(pattern: str, path: str, is_folder: bool) -> bool:
    """Return whether a line of .gitignore (plain names, * and folders; no ! and no **) leaves a path out."""
    if pattern.endswith("/") and not is_folder:
        return False
    pattern = pattern.removesuffix("/")
    if "/" in pattern:
        return fnmatch.fnmatchcase(path, pattern.removeprefix("/"))
    return fnmatch.fnmatchcase(path.rpartition("/")[2], pattern)


def top_level_faults(files: list[Path]) -> list[str]:
    """Return what is at the top and should not be, or should be and is not."""
    found = {file.parts[0] for file in files if not file.parts[0].startswith(".")}
    return [
        *(f"{name} does not belong at the top" for name in sorted(found - TOP_LEVEL)),
        *(f"{name} is missing" for name in sorted(TOP_LEVEL - found)),
    ]


def machine_paths(text: str) -> list[str]:
    """Return the lines, numbered, that name a folder of one machine."""
    return [f"{n}: {line.strip()}" for n, line in enumerate(text.splitlines(), start=1) if MACHINE_PATH.search(line)]


def test_the_top_level_is_as_planned(repository: Path) -> None:
    assert top_level_faults(list(project_files(repository))) == []


def test_no_file_names_a_folder_of_one_machine(repository: Path) -> None:
    faults = [
        f"{file.as_posix()}:{fault}"
        for file in project_files(repository)
        for fault in machine_paths((repository / file).read_bytes().decode("utf-8", errors="replace"))
    ]
    assert not faults, "\n" + "\n".join(faults)


def test_a_stray_and_a_missing_file_are_seen() -> None:
    files = [Path(name, "a") for name in TOP_LEVEL - {"README.md"}] + [Path("setup.py"), Path(".gitignore")]
    assert top_level_faults(files) == ["setup.py does not belong at the top", "README.md is missing"]


@pytest.mark.parametrize(
    "path", ["/" + "home/ann/x.csv", "open('/" + "tmp/x')", "file:///" + "Users/ann", "C:\\" + "Users\\ann"]
)
def test_a_machine_path_is_seen(path: str) -> None:
    assert len(machine_paths(f"first line\n{path}")) == 1


def test_other_paths_are_left_alone() -> None:
    text = "#!/usr/bin/env python3\n../demo_sets/work/a.csv\nhttps://example.org/home/page\n/tmpfs/a\nC:\\data"
    assert machine_paths(text) == []


def test_ignored_files_are_left_out(tmp_path: Path) -> None:
    (tmp_path / ".gitignore").write_text("build/\n*.egg-info/\ndemo_sets/results/\n", encoding="utf-8")
    for path in ("a.py", "b/build/x", "q.egg-info/x", "demo_sets/results/x", "results/x", "c/build", ".git/x"):
        (tmp_path / path).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / path).write_text("", encoding="utf-8")
    assert {path.as_posix() for path in project_files(tmp_path)} == {".gitignore", "a.py", "c/build", "results/x"}
