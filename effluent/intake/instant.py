"""When a result was analysed: local date and time as written, to an instant in UTC."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from datetime import UTC, date, datetime, time, timedelta
from zoneinfo import ZoneInfo

from effluent.errors import ValueRefused

__all__ = ["Clock"]

_ISO = re.compile(
    r"\d{4}-\d\d-\d\d(?P<time>[T ]\d\d:\d\d(:\d\d([.,]\d{1,6})?)? ?(Z|[+-]\d\d:?\d\d)?)?", re.ASCII
)
_TIME_DIRECTIVES = ("%H", "%I", "%X", "%c", "%T", "%R")
_OLDEST_YEAR = 1950
_NEWEST_YEAR = 2199


class _Offsets(dict[date, tuple[timedelta, ...]]):
    """Offsets from UTC in force on a local day: one, or more when the clocks change on it.

    Most days have one, and asking the zone once a day is several times faster than once a result.
    """

    def __init__(self, zone: ZoneInfo) -> None:
        super().__init__()
        self._zone = zone

    def __missing__(self, day: date) -> tuple[timedelta, ...]:
        start = datetime.combine(day, time(), self._zone)
        edges = (start, start + timedelta(days=1))
        found = {edge.replace(fold=fold).utcoffset() for edge in edges for fold in (0, 1)}
        self[day] = tuple(offset for offset in found if offset is not None)
        return self[day]


@dataclass(frozen=True)
class Clock:
    """Reads local times of one zone, written in one format or as ISO 8601.

    A date without a time is read as 23:59 of that local day: a holding time then counts in full. A time
    that the clocks showed twice is the later one; a time that they skipped is refused. An offset that is
    written counts more than the zone.
    """

    zone: ZoneInfo
    date_format: str = ""
    _offsets: _Offsets = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "_offsets", _Offsets(self.zone))

    def read(self, text: str) -> str:
        """Return the instant as ``YYYY-MM-DDTHH:MM:SS.ffffffZ``.

        Raises
        ------
        ValueRefused
            If the text is no date in the format declared or as ISO 8601, lies outside 1950 to 2199, or
            names a local time that the clocks skipped.
        """
        written, timed = self._parse(text)
        if not timed:
            written = written.replace(hour=23, minute=59)
        if not _OLDEST_YEAR <= written.year <= _NEWEST_YEAR:
            raise ValueRefused("date", text, f"its year is not one from {_OLDEST_YEAR} to {_NEWEST_YEAR}")
        if written.tzinfo is not None:
            instant = written.astimezone(UTC).replace(tzinfo=None)
        else:
            offsets = self._offsets[written.date()]
            instant = written - offsets[0] if len(offsets) == 1 else self._in_zone(written, text)
        return instant.isoformat(timespec="microseconds") + "Z"

    def _parse(self, text: str) -> tuple[datetime, bool]:
        """Return the date and time as written, and whether a time was written."""
        if self.date_format:
            try:
                read = datetime.strptime(text, self.date_format)  # noqa: DTZ007 - the zone comes next
            except ValueError:
                return self._iso(text)
            return read, any(mark in self.date_format for mark in _TIME_DIRECTIVES)
        return self._iso(text)

    def _iso(self, text: str) -> tuple[datetime, bool]:
        match = _ISO.fullmatch(text)
        try:
            if match is not None:
                return datetime.fromisoformat(text.replace(" Z", "Z").replace(" +", "+")), bool(match["time"])
        except ValueError:
            pass
        wanted = f"the format {self.date_format} or " if self.date_format else ""
        remedy = f"write it in {wanted}ISO 8601, as in 2026-03-05 14:30"
        raise ValueRefused("date", text, remedy if self.date_format else remedy + ", or declare date_format")

    def _in_zone(self, written: datetime, text: str) -> datetime:
        local = written.replace(tzinfo=self.zone, fold=1)
        instant = local.astimezone(UTC)
        if instant.astimezone(self.zone).utcoffset() != local.utcoffset():
            raise ValueRefused(
                "date",
                text,
                f"clocks in {self.zone} skipped that time; write it with its offset, as in +01:00",
            )
        return instant.replace(tzinfo=None)
