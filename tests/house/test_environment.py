"""The commands that start on a fresh clone: when they make the environment, and what they say when they cannot."""

import ast
import importlib.util
import shutil
import signal
import subprocess
import sys
import time
import tomllib
from pathlib import Path
from types import ModuleType

import pytest


def load(file: Path) -> ModuleType:
    """Return a file outside the package as a module."""
    spec = importlib.util.spec_from_file_location(f"frame_{file.parent.name}_{file.stem}", file)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # dataclasses look their module up
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def environment(repository: Path) -> ModuleType:
    return load(repository / "demo_sets" / "environment.py")


@pytest.fixture(scope="module")
def tests_run(repository: Path) -> ModuleType:
    return load(repository / "tests" / "run.py")


@pytest.fixture(scope="module")
def demo(repository: Path, environment: ModuleType) -> ModuleType:
    sys.modules.setdefault("environment", environment)  # as if the demo had been started in its own folder
    return load(repository / "demo_sets" / "run.py")


@pytest.fixture
def calls(environment: ModuleType, monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """What would have been run: making an environment writes its Python, pip does nothing."""
    made: list[str] = []

    def call(command: list[str], failure: str, folder: Path, variables: dict[str, str] | None) -> None:
        made.append(" ".join(command[2:] if "venv" in command else command[4:]))
        if "venv" in command:
            python = environment.Environment(folder).python
            python.parent.mkdir(parents=True)
            python.touch()

    monkeypatch.setattr(environment, "call", call)
    return made


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """A project in a folder with a space in its name."""
    folder = tmp_path / "a project"
    folder.mkdir()
    (folder / "pyproject.toml").write_text("[project]\n", encoding="utf-8")
    return folder


def test_the_second_start_finds_the_environment_ready(environment: ModuleType, project: Path, calls: list[str]) -> None:
    environment.Environment(project).prepare()
    assert calls == [f"venv {project / '.venv'}", "--no-input install -q -e ."]
    environment.Environment(project).prepare()
    assert len(calls) == 2


def test_what_the_tests_need_is_added_to_a_demo_environment(
    environment: ModuleType, project: Path, calls: list[str]
) -> None:
    environment.Environment(project).prepare()
    environment.Environment(project).prepare(["dev"])
    assert calls[2:] == ["--no-input install -q -e .[dev]"]
    environment.Environment(project).prepare()  # the demo takes an environment that holds more than it needs
    assert len(calls) == 3


def test_a_changed_project_file_makes_the_environment_afresh(
    environment: ModuleType, project: Path, calls: list[str]
) -> None:
    environment.Environment(project).prepare(["dev"])
    left_over = project / ".venv" / "lib" / "old"
    left_over.mkdir(parents=True)
    (project / "pyproject.toml").write_text("[project]\nname = 'x'\n", encoding="utf-8")
    environment.Environment(project).prepare()
    assert len(calls) == 4
    assert not left_over.exists()


def test_a_copied_environment_is_made_afresh(environment: ModuleType, project: Path, calls: list[str]) -> None:
    environment.Environment(project).prepare()
    moved = project.rename(project.with_name("elsewhere"))  # its scripts still name the old place
    environment.Environment(moved).prepare()
    assert len(calls) == 4


def test_a_failed_installation_is_tried_again(
    environment: ModuleType, project: Path, calls: list[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(command: list[str], *_: object) -> None:
        raise environment.CannotPrepare("no network")

    with monkeypatch.context() as context:
        context.setattr(environment, "call", fail)
        with pytest.raises(environment.CannotPrepare):
            environment.Environment(project).prepare()
    environment.Environment(project).prepare()
    assert len(calls) == 2


def test_a_folder_of_somebody_else_is_left_alone(environment: ModuleType, project: Path, calls: list[str]) -> None:
    (project / ".venv").mkdir()
    (project / ".venv" / "pyvenv.cfg").touch()
    with pytest.raises(environment.CannotPrepare, match="did not make"):
        environment.Environment(project).prepare()
    assert calls == []


def test_only_one_process_holds_the_lock(environment: ModuleType, project: Path, repository: Path) -> None:
    script = (
        f"import sys; sys.path.insert(0, {str(repository / 'demo_sets')!r}); import environment, pathlib\n"
        f"with environment.locked(pathlib.Path({str(project / 'lock')!r})): print('mine', flush=True)"
    )
    with environment.locked(project / "lock"):
        other = subprocess.Popen([sys.executable, "-c", script], stdout=subprocess.PIPE, text=True)
        assert other.stdout is not None
        assert "waiting" in other.stdout.readline()
        time.sleep(0.2)
        assert other.poll() is None
    rest, _ = other.communicate(timeout=10)
    assert rest.strip() == "mine"


@pytest.mark.parametrize("file", ["demo_sets/environment.py", "demo_sets/run.py", "tests/run.py"])
def test_an_old_python_gets_as_far_as_the_message(file: str, repository: Path) -> None:
    tree = ast.parse((repository / file).read_text(encoding="utf-8"), feature_version=(3, 7))
    assert "annotations" in {a.name for node in tree.body if isinstance(node, ast.ImportFrom) for a in node.names}


def test_an_old_python_is_named(environment: ModuleType) -> None:
    with pytest.raises(environment.CannotPrepare, match=r"This is Python 3\.9 .* needs 3\.11 or newer"):
        environment.check_python((3, 9))


def test_the_debian_package_is_named(environment: ModuleType) -> None:
    with pytest.raises(environment.CannotPrepare, match=r"lacks its module ensurepip.*apt install python3\.12-venv"):
        environment.check_python((3, 12), has=lambda name: name != "ensurepip")


def test_the_oldest_python_is_that_of_the_project_file(environment: ModuleType, repository: Path) -> None:
    settings = tomllib.loads((repository / "pyproject.toml").read_text(encoding="utf-8"))
    assert settings["project"]["requires-python"] == f">={'.'.join(map(str, environment.OLDEST_PYTHON))}"


def test_the_last_lines_of_a_failure_are_shown(environment: ModuleType, tmp_path: Path) -> None:
    script = "import sys; print(*range(100, 200), sep='\\n'); print('no such package', file=sys.stderr); sys.exit(3)"
    with pytest.raises(environment.CannotPrepare, match=r"pip failed \(exit code 3\)") as caught:
        environment.call([sys.executable, "-c", script], "pip failed", tmp_path, None)
    shown = [line.strip() for line in str(caught.value).splitlines()[1:-1]]
    assert len(shown) == environment.LINES_SHOWN
    assert {"199", "no such package"} <= set(shown)


def test_programs_run_apart_from_other_checkouts_and_say_how_they_ended(
    environment: ModuleType, project: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    place = environment.Environment(project)
    place.programs.mkdir(parents=True)
    (place.programs / "sh").symlink_to(shutil.which("sh") or "sh")
    monkeypatch.setenv("PYTHONPATH", str(project))
    assert place.run(["sh", "-c", 'test -z "${PYTHONPATH+set}"']) == 0
    assert place.run(["sh", "-c", "exit 3"]) == 3
    assert place.run(["sh", "-c", "kill -TERM $$"]) == 128 + signal.SIGTERM


@pytest.mark.parametrize(
    ("arguments", "alone"),
    [
        ([], False),
        (["-k", "long"], False),
        (["-m", "not long"], False),
        (["-x", "tests/house"], False),
        (["-m", "long"], True),
        (["-mbenchmark"], True),
        (["-m", "long or benchmark"], True),
        (["-n", "4"], True),
        (["-n0"], True),
        (["--dist=loadfile"], True),
        (["--pdb"], True),
    ],
)
def test_what_runs_alone(tests_run: ModuleType, arguments: list[str], alone: bool) -> None:
    assert tests_run.runs_alone(arguments) is alone


def test_paths_are_taken_from_where_the_command_was_started(tests_run: ModuleType, repository: Path) -> None:
    here = Path(__file__).parent
    absolute = str(here / "test_sizes.py")
    assert tests_run.from_here("test_sizes.py", here) == absolute
    assert tests_run.from_here("test_sizes.py::test_a", here) == f"{absolute}::test_a"
    for unchanged in ("tests/house", "-k", "no_such_file.py", "not long"):
        assert tests_run.from_here(unchanged, here) == unchanged


@pytest.mark.parametrize(("expected", "code", "result"), [(0, 0, 0), (1, 1, 0), (1, 0, 1), (0, 1, 1), (0, 3, 3)])
def test_the_demo_stops_at_an_unexpected_exit_code(
    demo: ModuleType, project: Path, monkeypatch: pytest.MonkeyPatch, expected: int, code: int, result: int
) -> None:
    ran: list[list[str]] = []

    class Place:
        root = project
        programs = project / ".venv" / "bin"

        def run(self, words: list[str]) -> int:
            ran.append(words)
            return code

    (project / "demo_sets").mkdir()
    monkeypatch.setattr(demo.environment, "prepared", Place)
    monkeypatch.setattr(demo, "STEPS", [demo.Step("try", "quant inspect a.toml", expected=expected)] * 2)
    assert demo.main() == result
    assert ran == [["quant", "inspect", "a.toml"]] * (2 if result == 0 else 1)


def test_the_demo_tells_a_crash_from_a_verdict(
    demo: ModuleType, project: Path, environment: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    (project / "table.csv").write_text("of an earlier run", encoding="utf-8")
    place = environment.Environment(project)
    step = demo.Step("try", "quant predict", writes="table.csv", expected=1)
    monkeypatch.setattr(place, "run", lambda _: 1)
    assert demo.problem_with(step, place) == ("exit code 1 was expected, but table.csv was not written", 1)
    monkeypatch.setattr(place, "run", lambda _: (project / "table.csv").touch() or 1)
    assert demo.problem_with(step, place) == ("", 1)


def test_the_demo_names_files_that_are_there(demo: ModuleType, repository: Path) -> None:
    for step in demo.STEPS:
        for word in demo.words_of(step.command):
            if word.startswith(("configs/", "demo_sets/")) and not word.startswith(demo.RESULTS):
                assert (repository / word).exists(), f"{step.command}: {word} is missing"
