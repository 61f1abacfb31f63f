"""What a field of a record means, said once for the command line, the store and the documentation."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping
from typing import Any

__all__ = ["about"]


def about(
    meaning: str,
    *,
    refers: str | None = None,
    measures: str | None = None,
    default: Any = dataclasses.MISSING,
    also: Mapping[str, Any] | None = None,
) -> Any:
    """Declare a dataclass field.

    Parameters
    ----------
    meaning : str
        One line that a user reads as help.
    refers : str, optional
        The noun whose code this field holds.
    measures : str, optional
        The kind of quantity it holds, a name of `effluent.calc.units`.
    default : object, optional
        Without one the field is required.
    also : mapping, optional
        Further metadata.
    """
    metadata = {"meaning": meaning, "refers": refers, "measures": measures, **(also or {})}
    if default is dataclasses.MISSING:
        return dataclasses.field(metadata=metadata)
    return dataclasses.field(default=default, metadata=metadata)
