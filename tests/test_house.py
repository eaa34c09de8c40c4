"""The house keeps its own rules: layers, light starts, sizes, types, style, top level."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
LAYERS = ("errors", "motion", "brief", "objective", "search", "analysis", "report", "cli")
"""From the bottom up: each may import only itself and what stands before it."""
SOURCES = sorted((ROOT / "designer").rglob("*.py"))
TESTS = sorted((ROOT / "tests").rglob("*.py"))


def layer(module: str) -> int:
    return LAYERS.index(module.split(".")[1])


def imports_of(path: Path) -> list[str]:
    found = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.ImportFrom) and node.module:
            found += [f"{node.module}.{alias.name}" for alias in node.names]
        elif isinstance(node, ast.Import):
            found += [alias.name for alias in node.names]
    return found


@pytest.mark.parametrize("path", SOURCES, ids=lambda path: str(path.relative_to(ROOT)))
def test_below_imports_nothing_above(path: Path) -> None:
    parts = path.relative_to(ROOT).with_suffix("").parts
    if len(parts) == 2 and parts[1] in ("__init__", "__main__"):
        return  # the front door knows every room
    own = layer(".".join(parts))
    for name in imports_of(path):
        if name.startswith("designer.") and name.split(".")[1] in LAYERS:
            assert layer(name) <= own, f"{path.name} imports {name}, which is above it"


def test_motion_knows_only_arrays() -> None:
    standard = set(sys.stdlib_module_names)
    for path in (ROOT / "designer" / "motion").glob("*.py"):
        assert {name.split(".")[0] for name in imports_of(path)} <= standard | {"designer", "numpy", "numba"}


def modules_after(code: str) -> set[str]:
    script = f"import sys\n{code}\nprint('\\n'.join(sys.modules))"
    run = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, cwd=ROOT, check=True)
    return set(run.stdout.split("\n"))


def test_the_overview_starts_light() -> None:
    loaded = modules_after("from designer.cli import main; main(['--help'])")
    assert not {"matplotlib", "optuna", "scipy", "numpy", "numba"} & loaded


@pytest.mark.parametrize("name", ["night-market-courier", "low-gravity-salvage", "rhythm-hopper",
                                  "heavy-knight", "tile-platformer", "harbour-crew"])  # fmt: skip
def test_check_starts_light(name: str) -> None:
    loaded = modules_after(f"from designer.cli import main; main(['check', 'objectives/{name}.toml'])")
    assert "numpy" in loaded  # or the command did not run at all
    assert not {"matplotlib", "optuna", "scipy", "numba"} & loaded


def test_check_stays_light_however_long_the_flights_are() -> None:
    options = "'--set', 'launch_speed=3.5'"
    loaded = modules_after(
        f"from designer.cli import main; main(['check', 'objectives/low-gravity-salvage.toml', {options}])"
    )
    assert "numpy" in loaded
    assert not {"matplotlib", "optuna", "scipy", "numba"} & loaded


def test_importing_the_library_starts_light() -> None:
    assert not {"matplotlib", "optuna", "scipy", "numpy", "numba", "pydantic"} & modules_after(
        "import designer"
    )


def test_search_is_a_function_whatever_was_imported_before() -> None:
    for before in ("import designer", "import designer.search.result", "import designer.report.pictures"):
        script = f"{before}\nimport designer\nassert callable(designer.search)\ndesigner.search(None)"
        run = subprocess.run(
            [sys.executable, "-c", script], capture_output=True, text=True, cwd=ROOT, check=False
        )
        assert "'NoneType' object has no attribute" in run.stderr, run.stderr


def test_every_public_name_is_there() -> None:
    import designer

    for name in designer.__all__:
        assert getattr(designer, name) is not None


@pytest.mark.parametrize("path", [*SOURCES, *TESTS], ids=lambda path: str(path.relative_to(ROOT)))
def test_files_and_functions_stay_small(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    assert text.count("\n") <= 440, "a file of about 400 lines at most"
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef):
            length = (node.end_lineno or node.lineno) - node.lineno + 1
            limit = 50 if path.name == "kernel.py" else 60
            assert length <= limit, f"{node.name} has {length} lines"


def test_top_level_holds_what_belongs_there() -> None:
    listed = subprocess.run(["git", "ls-files"], capture_output=True, text=True, cwd=ROOT, check=True).stdout
    allowed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "designer", "tests", "objectives", "results"}
    tops = {line.split("/")[0] for line in listed.splitlines()}
    assert {top for top in tops if not top.startswith(".")} <= allowed


LINTERS = (("ruff", "check"), ("ruff", "format", "--check", "designer", "tests", "objectives"), ("mypy",))


@pytest.mark.parametrize("arguments", LINTERS, ids=" ".join)
def test_linters_have_nothing_to_say(arguments: tuple[str, ...]) -> None:
    run = subprocess.run(
        [sys.executable, "-m", *arguments], capture_output=True, text=True, cwd=ROOT, check=False
    )
    assert run.returncode == 0, run.stdout + run.stderr


def test_every_command_is_documented() -> None:
    from designer.cli import COMMANDS

    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    for name in COMMANDS:
        assert f"leapwright {name}" in readme
