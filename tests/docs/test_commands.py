"""The command reference is what the commands say; every variable of the settings is in it."""

from effluent import settings
from tests.docs.commands import reference
from tests.docs.source import ROOT


def test_command_reference_equals_commands():
    written = (ROOT / "docs" / "commands.md").read_text(encoding="utf-8")
    assert written == reference(), "run: python -m tests.docs.commands > docs/commands.md"


def test_every_environment_variable_is_documented():
    variables = [value for name, value in vars(settings).items() if name.endswith("_VARIABLE")]
    assert variables
    assert all(f"`{variable}`" in reference() for variable in variables)
