# SPDX-License-Identifier: Apache-2.0
"""The house itself: imports run one way, nothing heavy loads early, families list their members, the public names agree."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

import chronos_acc

PACKAGE = Path(chronos_acc.__file__).parent
ROOT = PACKAGE.parent

# Each room may import the rooms named here (and itself); what is missing is an upward import.
MAY = {
    "errors": set(),
    "progress": set(),
    "files": {"errors"},
    "notebook": set(),
    "dating": {"errors", "files"},
    "mixture": {"dating"},
    "record": {"mixture", "dating", "errors", "progress"},
    "merge": {"record", "mixture", "dating", "errors", "progress"},
    "intervals": {"record", "mixture", "dating", "errors", "progress", "notebook"},
    "store": {"merge", "record", "mixture", "dating", "errors", "files", "progress", "intervals", "notebook", "chronos_acc"},
    "trend": {"record", "mixture", "dating", "errors", "progress", "chronos_acc", "intervals", "notebook"},
    "bias": {"trend", "merge", "record", "mixture", "dating", "errors", "progress", "chronos_acc", "intervals", "notebook"},
    "report": {"bias", "trend", "merge", "store", "record", "mixture", "dating", "errors", "files", "progress", "intervals", "notebook", "chronos_acc"},
    "steps": {"report", "store", "bias", "trend", "merge", "record", "mixture", "dating", "errors", "progress", "intervals"},
    "cli": {"steps", "report", "store", "bias", "trend", "merge", "record", "mixture", "dating", "errors", "files", "progress", "intervals", "notebook", "chronos_acc"},
}


def _room(module: str) -> str:
    parts = module.split(".")
    return parts[1] if len(parts) > 1 else parts[0]


def _imports(path: Path) -> set[str]:
    """Absolute names of everything of ours that a file imports, wherever in the file."""
    own = ["chronos_acc", *path.relative_to(PACKAGE).with_suffix("").parts]
    package = own if path.name == "__init__.py" else own
    base = package[:-1]
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {a.name for a in node.names if a.name.split(".")[0] == "chronos_acc"}
        elif isinstance(node, ast.ImportFrom):
            if node.level:
                stem = base[: len(base) - node.level + 1]
                module = ".".join([*stem, *([node.module] if node.module else [])])
            else:
                module = node.module or ""
            if module.split(".")[0] != "chronos_acc":
                continue
            if module == "chronos_acc":
                found |= {f"chronos_acc.{a.name}" if (PACKAGE / a.name).exists() or (PACKAGE / f"{a.name}.py").exists() else "chronos_acc" for a in node.names}
            else:
                found.add(module)
    return found


def test_imports_run_one_way():
    wrong = []
    for path in PACKAGE.rglob("*.py"):
        room = _room(".".join(["chronos_acc", *path.relative_to(PACKAGE).with_suffix("").parts]))
        if room not in MAY:
            assert room in ("__init__", "__main__"), f"{path} stands in no known room"
            continue
        wrong += [f"{path.relative_to(ROOT)} imports {name}" for name in sorted(_imports(path)) if _room(name) not in MAY[room] | {room}]
    assert not wrong, "\n".join(wrong)


def _only(word: str, rooms: set[str]) -> list[str]:
    found = []
    for path in PACKAGE.rglob("*.py"):
        room = _room(".".join(["chronos_acc", *path.relative_to(PACKAGE).with_suffix("").parts]))
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            names = [a.name for a in node.names] if isinstance(node, ast.Import) else [node.module or ""] if isinstance(node, ast.ImportFrom) and not node.level else []
            if any(n.split(".")[0] == word for n in names) and room not in rooms:
                found.append(str(path.relative_to(ROOT)))
    return found


@pytest.mark.parametrize("library, rooms", [("duckdb", {"store"}), ("rich", {"report"}), ("numpy", {"mixture", "record", "merge", "intervals", "store", "trend", "bias", "report"})])
def test_each_library_lives_in_its_rooms(library, rooms):
    assert not _only(library, rooms)


def test_no_assert_and_nothing_left_open_in_the_package():
    for path in PACKAGE.rglob("*.py"):
        text = path.read_text(encoding="utf-8")
        assert not any(isinstance(node, ast.Assert) for node in ast.walk(ast.parse(text))), path
        for word in ("TO" + "DO", "FIX" + "ME", "X" * 3):
            assert word not in text, path


def test_top_level_is_the_design_card():
    allowed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "chronos_acc", "tests", "datasets", "queries"}
    tracked = subprocess.run(["git", "ls-tree", "--name-only", "HEAD"], cwd=ROOT, capture_output=True, text=True, check=False)
    if tracked.returncode:
        pytest.skip("not a git checkout")
    assert {n for n in tracked.stdout.split() if not n.startswith(".")} <= allowed


HEAVY = ("numpy", "pandas", "scipy", "statsmodels", "duckdb", "rich")


def _loaded(code: str) -> set[str]:
    script = f"{code}\nimport sys\nprint(' '.join(m for m in {HEAVY!r} if m in sys.modules))"
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    return set(done.stdout.splitlines()[-1].split())


def test_import_is_light_and_public_names_agree():
    assert not _loaded("import chronos_acc")
    assert list(chronos_acc.__all__) == sorted(chronos_acc.__all__)
    for name in chronos_acc.__all__:
        assert getattr(chronos_acc, name) is not None
    with pytest.raises(AttributeError):
        chronos_acc.nothing_of_that_name  # noqa: B018


def test_help_of_everything_loads_nothing_heavy():
    code = (
        "import io, contextlib\nfrom chronos_acc.cli import main\nfrom chronos_acc.cli.registry import COMMANDS\n"
        "with contextlib.redirect_stdout(io.StringIO()):\n"
        "    for words in [['--help'], ['--version'], *([c.name, '--help'] for c in COMMANDS)]:\n"
        "        status = main(words)\n"
        "        assert status == 0, words\n"
        "print()"
    )
    assert not _loaded(code)


def test_registry_and_folder_agree():
    from chronos_acc.cli.registry import COMMANDS

    folder = {p.stem for p in (PACKAGE / "cli" / "commands").glob("*.py")} - {"__init__"}
    assert folder == {c.module for c in COMMANDS}
    for entry in COMMANDS:
        command = entry.load()
        assert command.name == entry.name
        assert command.example.startswith(f"chronos-acc {entry.name}")
