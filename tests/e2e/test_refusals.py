"""Whatever is typed, a command answers or refuses in one paragraph, and a refusal leaves nothing behind."""

from __future__ import annotations

import os
import re
import shlex
from datetime import date, timedelta
from functools import partial
from pathlib import Path

import pytest

from effluent import wiring
from effluent.__main__ import run
from effluent.domain import (
    Cleaner,
    CleanerForm,
    CleanerType,
    Company,
    CompanyRole,
    Container,
    ContainerKind,
    Engine,
    Movement,
    MovementKind,
    Person,
    Point,
    PointKind,
    Quantity,
    Site,
)
from effluent.services import ledger as ledgers
from effluent.services import manifest as manifests
from effluent.store.ledger import Ledger
from tests.e2e.wrong import SOUND, Call, commands, wrong_calls
from tests.shipping import add_parties, line, manifest, ready
from tests.world import NOON, NOW, add_limit, add_result, add_sample, add_wash, record, world

_COMMANDS = dict(commands())
_REFUSED = re.compile(r"E\d{3}: \S|Usage: effluent |Error: Option ")
_CONTROL = re.compile("[\x00-\x09\x0b-\x1f\x7f-\x9f\u202a-\u202e\ud800-\udfff]")
_LONGEST, _EACH = 4_000, 2
_LABORATORY = "sample,analyte,value,unit,fraction,analysed_at\nS-0005,nickel,0.1,mg/L,total,2026-03-05\n"


def _fill_ledger(book: Ledger) -> None:
    """Record one of everything that the sound calls name, and spares that nothing refers to."""
    add_parties(book)
    ready(book, "D-1", "D-2", "D-3", "D-4")
    add_limit(book, "SEW", "copper", "2 mg/L", verified_by=None, verified_on=None)
    litres = Quantity("10", "L")
    record(
        book,
        Movement(
            kind=MovementKind.WITHDRAWAL,
            moved_at=NOON + timedelta(hours=2),
            moved_by="AM",
            volume=litres,
            source="T-1",
            destination="works",
        ),
    )


def _spares() -> tuple[object, ...]:
    return (
        Cleaner(code="AQ", label="Blue", type=CleanerType.AQUEOUS, form=CleanerForm.READY),
        Company(code="SPARE", name="Spare", role=CompanyRole.CARRIER),
        Container(code="SPARE", kind=ContainerKind.DRUM, site="LIS", capacity=Quantity("208", "L")),
        Engine(code="SPARE", type_label="Spare", site="LIS"),
        Person(code="SPARE", name="Spare"),
        Point(code="SPARE", site="LIS", name="spare", kind=PointKind.SEWER),
        Site(code="SPARE", name="Spare", operator="Invented", address="-", time_zone="UTC"),
    )


def _add_manifests(book: Ledger) -> None:
    manifests.draft(book, manifest(line("D-3"), line("D-1")), by="AM")
    manifests.draft(book, manifest(line("D-4")), by="AM")
    manifests.issue(book, "M-0002", by="AM", on=date(2026, 5, 1))


def _make(folder: Path) -> None:
    """Make the ledger of the sweep, and what wrong values point to."""
    place = str(folder / "sweep.ledger")
    with world(place) as book:
        _fill_ledger(book)
        record(book, *_spares())
        _add_manifests(book)
        add_wash(book)
        add_sample(book, started_at=NOON + timedelta(hours=3))
        for days in range(4):
            drawn = add_sample(book, point="SEW", started_at=NOON + timedelta(days=days))
            add_result(book, drawn, "cadmium", f"0.0{days + 1}", "mg/L")
        ledgers.backup(book, str(folder / "backup.ledger"))
    (folder / "laboratory.csv").write_text(_LABORATORY)
    (folder / "a-file").write_text("text")
    (folder / "binary").write_bytes(bytes(range(256)) * 20)
    os.mkfifo(folder / "pipe")
    (folder / "loop").symlink_to("loop")
    (folder / "dangling").symlink_to("nowhere")


def _kept(folder: Path) -> dict[str, bytes]:
    """Return what is in the folder, and what is in each file of it."""
    return {each.name: each.read_bytes() if each.is_file() else b"" for each in folder.iterdir()}


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, dict[str, bytes]]:
    folder = tmp_path_factory.mktemp("sweep")
    _make(folder)
    return folder, _kept(folder)


class Sweep:
    """Runs calls on a ledger, each of which finds it as the first one did."""

    def __init__(self, folder: Path, before: dict[str, bytes], capsys: pytest.CaptureFixture[str]) -> None:
        self.folder, self.before, self.capsys = folder, before, capsys
        with ledgers.open_ledger(str(folder / "sweep.ledger")) as book, book.reading() as reading:
            self.places = {"dir": str(folder), "digest": reading.entry(1).digest}

    def run(self, call: Call) -> tuple[int, str, str, bool]:
        """Run a call, put things back, and return status, output, complaint and whether it left a trace."""
        status = run(call.typed(**self.places))
        said = self.capsys.readouterr()
        after = _kept(self.folder)
        for name in after.keys() - self.before.keys():
            (self.folder / name).unlink()
        for name in {name for name, held in after.items() if held != self.before.get(name, held)}:
            (self.folder / name).write_bytes(self.before[name])
        return status, said.out, said.err, after != self.before


@pytest.fixture
def sweep(
    made: tuple[Path, dict[str, bytes]],
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> Sweep:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("EFFLUENT_LEDGER", str(made[0] / "sweep.ledger"))
    monkeypatch.setenv("EFFLUENT_BY", "AM")
    monkeypatch.setattr(wiring, "open_ledger", partial(ledgers.open_ledger, clock=lambda: NOW))
    return Sweep(*made, capsys)


def _faults(status: int, out: str, err: str, left: bool) -> list[str]:
    """Return what is wrong with how a call ended."""
    refused = status > 1
    checks = {
        f"status {status}": 0 <= status <= 5,
        "nothing is said": bool(out or err),
        "it steers the terminal": not _CONTROL.search(out + err),
        "an answer beside the refusal": not (refused and out),
        "no code and no usage": not refused or bool(_REFUSED.match(err)),
        "more than one paragraph": "\n\n" not in err or err.startswith("Usage: "),
        f"{len(err)} characters": len(err) <= _LONGEST,
        "it left a trace": not (refused and left),
    }
    return [name for name, holds in checks.items() if not holds]


@pytest.mark.parametrize("path", sorted(_COMMANDS.keys() - {"demo"}))
def test_sound_call_of_each_command_is_taken(sweep: Sweep, path: str) -> None:
    status, out, err, _ = sweep.run(Call(path, tuple(shlex.split(SOUND[path]))))
    assert (status, bool(out), err.startswith("E")) == (status & 1, True, False), err


@pytest.mark.parametrize("path", sorted(_COMMANDS))
def test_wrong_call_is_answered_or_refused_and_a_refusal_leaves_no_trace(sweep: Sweep, path: str) -> None:
    turn = sorted(_COMMANDS).index(path)
    for call in wrong_calls(path, _COMMANDS[path], turn=turn, each=_EACH):
        faults = _faults(*sweep.run(call))
        assert not faults, (call, faults)
