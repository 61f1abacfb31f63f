"""Whether a sample speaks for the water that a container holds."""

from __future__ import annotations

from effluent.services.container import contents_of
from effluent.services.moment import at_site, shown
from effluent.store.reading import Reading

__all__ = ["unsampled"]


def unsampled(reading: Reading, container: str) -> str:
    """Return why no sample speaks for the water in a container; empty if one does, or if it holds none."""
    contents = contents_of(reading, container)
    if not contents.level_l:
        return ""
    filled = max(each.moved_at for each in contents.movements if each.target == contents.container.code)
    samples = reading.values("sample", container=contents.container.code)
    if any(sample.started_at > filled for sample in samples):
        return ""
    when = shown(at_site(filled, reading.value("site", contents.container.site)))
    gap = "after its last sample was taken" if samples else "and no sample was taken"
    return f"container {container}: water went in {gap} ({when}); no verdict speaks for what it holds now"
