"""The laboratories' post: their files arrive in a folder and are read in."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date, time
from pathlib import Path

from effluent.errors import FileRefused
from effluent.services.demo.assay import Sending, long_rows, spoiled, wide_rows, write_long, write_wide
from effluent.services.demo.stage import Stage
from effluent.services.demo.station import Bottle, Station
from effluent.services.importing import Order, import_files

__all__ = ["Post"]

_OFFICER = "RS"


class Post:
    """Files of both laboratories; ``told`` are the cells that the scenario prescribes."""

    def __init__(self, stage: Stage, folder: Path) -> None:
        self.stage = stage
        self.folder = folder
        self.told: dict[tuple[str, str], str] = {}
        self.files: list[str] = []

    def deliver(self, station: Station, bottles: Sequence[Bottle], day: date) -> None:
        """Let the laboratory's file for these bottles arrive and be read in."""
        self.stage.set_clock(day, time(14), station.place.zone)
        name = station.place.laboratory.lower()
        sending = Sending(f"{name[:2].upper()}-{day:%y%m%d}", bottles, self.told)
        if name == "ribeira":
            path = self.folder / f"{name}-{day}.csv"
            write_long(path, long_rows(self.stage, sending))
        else:
            path = self.folder / f"{name}-{day}.xlsx"
            write_wide(path, wide_rows(self.stage, sending))
        import_files(self.stage.book, self._order(path), by=_OFFICER)
        self.files.append(path.name)

    def deliver_spoiled(self, station: Station, bottles: Sequence[Bottle], day: date) -> tuple[str, str]:
        """Let a spoiled file arrive, which is refused; return its name and what was said."""
        self.stage.set_clock(day, time(11), station.place.zone)
        sending = Sending(f"RI-{day:%y%m%d}", bottles, self.told)
        path = self.folder / f"ribeira-{day}-spoiled.csv"
        write_long(path, spoiled(long_rows(self.stage, sending)))
        try:
            import_files(self.stage.book, self._order(path), by=_OFFICER)
        except FileRefused as refusal:
            return path.name, str(refusal)
        raise AssertionError(f"{path.name} was not refused")

    def _order(self, path: Path) -> Order:
        return Order(paths=[path], layout=self.folder / f"{path.name.partition('-')[0]}.toml")
