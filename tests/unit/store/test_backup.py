from __future__ import annotations

import errno
import os
from pathlib import Path

import pytest

from effluent.errors import StorageFailed, WouldOverwrite
from effluent.store.backup import appearing


def refuse(number: int) -> object:
    def link(*_: object) -> None:
        raise OSError(number, os.strerror(number))

    return link


@pytest.mark.parametrize("links", [True, False])
def test_file_appears_when_all_is_in_it(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, *, links: bool
) -> None:
    if not links:
        monkeypatch.setattr(os, "link", refuse(errno.EPERM))
    with appearing(str(tmp_path / "new")) as unfinished:
        unfinished.write_text("all of it")
        assert not (tmp_path / "new").exists()
    assert [path.name for path in tmp_path.iterdir()] == ["new"]
    assert (tmp_path / "new").read_text() == "all of it"


@pytest.mark.parametrize("links", [True, False])
def test_file_that_came_in_between_is_left_alone(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, *, links: bool
) -> None:
    if not links:
        monkeypatch.setattr(os, "link", refuse(errno.EPERM))
    with pytest.raises(WouldOverwrite), appearing(str(tmp_path / "new")) as unfinished:
        unfinished.write_text(str((tmp_path / "new").write_text("theirs")))
    assert [path.name for path in tmp_path.iterdir()] == ["new"]
    assert (tmp_path / "new").read_text() == "theirs"


def test_name_that_cannot_be_given_is_an_error_of_ours(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(os, "link", refuse(errno.ENOSPC))
    with pytest.raises(StorageFailed, match="No space left"), appearing(str(tmp_path / "new")) as unfinished:
        unfinished.write_text("all of it")
    assert list(tmp_path.iterdir()) == []


def test_block_that_fails_leaves_nothing(tmp_path: Path) -> None:
    with pytest.raises(ZeroDivisionError), appearing(str(tmp_path / "new")) as unfinished:
        unfinished.write_text(str(1 / 0))
    assert list(tmp_path.iterdir()) == []
