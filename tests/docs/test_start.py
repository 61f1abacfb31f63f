"""Starting costs little: what a fresh interpreter loads for the domain and for the root help."""

from __future__ import annotations

import subprocess
import sys

HELP = "import sys; from effluent.__main__ import run; status = run(sys.argv[1:]); assert status == 0, status"


def loaded(code: str, *arguments: str) -> set[str]:
    """Return the modules a fresh interpreter has loaded after running the code."""
    code += "\nimport sys; sys.stderr.write(' '.join(sys.modules))"
    command = [sys.executable, "-c", code, *arguments]
    return set(subprocess.run(command, capture_output=True, check=True, text=True, cwd="/").stderr.split())


def from_elsewhere(modules: set[str]) -> set[str]:
    """Return the packages that neither Python, nor its start-up in this place, nor effluent brought."""
    packages = {name.partition(".")[0] for name in modules - loaded("")}
    return packages - set(sys.stdlib_module_names) - {"effluent"}


def test_domain_loads_no_other_package() -> None:
    assert from_elsewhere(loaded("import effluent.domain")) == set()


def test_root_help_loads_click_and_its_table_only() -> None:
    modules = loaded(HELP, "--help")
    assert from_elsewhere(modules) == {"click"}
    assert {name for name in modules if name.startswith("effluent")} == {
        "effluent",
        "effluent.__main__",
        "effluent.cli",
        "effluent.cli.group",
        "effluent.errors",
        "effluent.settings",
    }


def test_root_help_loads_no_slow_part_of_the_library() -> None:
    slow = {"dataclasses", "importlib.metadata", "json", "difflib", "sqlite3", "zoneinfo", "decimal"}
    assert loaded(HELP, "--help") & slow == set()


def test_help_of_a_register_loads_click_only() -> None:
    assert from_elsewhere(loaded(HELP, "site", "add", "--help")) == {"click"}
