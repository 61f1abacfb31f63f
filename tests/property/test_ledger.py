"""Whatever is recorded, amended and voided, the ledger answers as a plain dict would, and verifies."""

from __future__ import annotations

import shutil
import subprocess
import sys
import tempfile
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, initialize, invariant, precondition, rule

from effluent.domain import Company, CompanyRole, Person
from effluent.errors import AlreadyRecorded, RecordMissing
from effluent.services.ledger import create, open_ledger, prove
from tests.fault.book import MIRA, ticking
from tests.unit.store.test_format import script

CODES = st.sampled_from(["A", "B", "C", "µ/ü", "a"])
TEXTS = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\x00"), max_size=20)

State = dict[str, tuple[Company, bool]]


class LedgerMachine(RuleBasedStateMachine):
    """Companies by code, and whether each was voided, after every entry."""

    def __init__(self) -> None:
        super().__init__()
        self.folder = Path(tempfile.mkdtemp())
        self.place = str(self.folder / "ledger.effluent")
        clock = ticking()
        create(self.place, MIRA, clock=clock)
        self.ledger = open_ledger(self.place, clock=clock)
        self.known: list[State] = [{}]

    @initialize()
    def somebody_else(self) -> None:
        self.ledger.write(lambda w: w.record(Person(code="X", name="X")), by="MS", action="add")
        self.known.append({})

    def standing(self, code: str) -> bool:
        return code in self.known[-1] and not self.known[-1][code][1]

    def became(self, code: str, company: Company, *, voided: bool) -> None:
        self.known.append({**self.known[-1], code: (company, voided)})

    @rule(code=CODES, name=TEXTS)
    def record(self, code: str, name: str) -> None:
        company = Company(code=code, name=name, role=CompanyRole.CARRIER)
        if code in self.known[-1]:
            with pytest.raises(AlreadyRecorded):
                self.ledger.write(lambda w: w.record(company), by="X", action="add")
        else:
            assert self.ledger.write(lambda w: w.record(company), by="X", action="add") == code
            self.became(code, company, voided=False)

    @rule(code=CODES, phone=TEXTS, reason=TEXTS)
    def amend(self, code: str, phone: str, reason: str) -> None:
        company = Company(code=code, name="", role=CompanyRole.FACILITY)
        if self.standing(code):
            company = replace(self.known[-1][code][0], phone=phone)
            self.ledger.write(lambda w: w.amend(company), by="MS", action="amend", reason=reason)
            self.became(code, company, voided=False)
        else:
            with pytest.raises(RecordMissing):
                self.ledger.write(lambda w: w.amend(company), by="MS", action="amend", reason=reason)

    @rule(code=CODES)
    def void(self, code: str) -> None:
        if self.standing(code):
            self.ledger.write(lambda w: w.void("company", code), by="MS", action="void", reason="gone")
            self.became(code, self.known[-1][code][0], voided=True)
        else:
            with pytest.raises(RecordMissing):
                self.ledger.write(lambda w: w.void("company", code), by="MS", action="void", reason="gone")

    @precondition(lambda self: len(self.known) > 2)
    @rule(data=st.data())
    def read_as_of(self, data: st.DataObject) -> None:
        sequence = data.draw(st.integers(1, len(self.known)))
        expected = {code: company for code, (company, gone) in self.known[sequence - 1].items() if not gone}
        with self.ledger.reading(str(sequence)) as reading:
            assert {company.code: company for company in reading.values("company")} == expected
            for code, (company, gone) in self.known[sequence - 1].items():
                last = reading.versions("company", code)[-1]
                assert (last.value, last.voided) == (company, gone)

    @invariant()
    def every_change_is_one_entry(self) -> None:
        assert self.ledger.head().sequence == len(self.known)

    def teardown(self) -> None:
        report = prove(self.ledger)
        self.ledger.close()
        assert (report.entries, report.findings) == (len(self.known), ())
        check = [sys.executable, "-I", "-c", script(), self.place]
        done = subprocess.run(check, capture_output=True, text=True, check=False)
        assert (done.stdout, done.stderr) == ("everything holds\n", "")
        shutil.rmtree(self.folder)


LedgerMachine.TestCase.settings = settings(
    max_examples=8, stateful_step_count=12, deadline=None, suppress_health_check=[HealthCheck.too_slow]
)
TestLedger = LedgerMachine.TestCase
