"""Which containers have left, or stand on a paper that is being prepared."""

from __future__ import annotations

from collections.abc import Sequence

from effluent.domain import Manifest, ManifestState
from effluent.store.reading import Reading

__all__ = ["drafts_with", "shipped_containers"]

_GONE = (ManifestState.ISSUED, ManifestState.RETURNED)


def shipped_containers(reading: Reading) -> frozenset[str]:
    """Return the containers on issued or returned manifests; nothing goes into or out of them any more."""
    return frozenset(
        line.container for gone in reading.values("manifest", state=_GONE) for line in gone.lines
    )


def drafts_with(
    reading: Reading, containers: Sequence[str], *, other_than: str
) -> dict[str, tuple[str, ...]]:
    """Return for each of the containers the drafts it stands on, leaving one manifest aside."""
    drafts: tuple[Manifest, ...] = reading.values("manifest", state=ManifestState.DRAFT)
    standing = {
        container: tuple(
            draft.code
            for draft in drafts
            if draft.code != other_than and any(line.container == container for line in draft.lines)
        )
        for container in containers
    }
    return {container: codes for container, codes in standing.items() if codes}
