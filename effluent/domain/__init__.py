"""The trade as frozen values; the standard library is enough for them."""

from effluent.domain.limit import (
    Bound,
    BrokenBy,
    Limit,
    NonDetectRule,
    Outcome,
    Rounding,
    Statistic,
    Verdict,
)
from effluent.domain.manifest import Manifest, ManifestLine, ManifestState
from effluent.domain.quantity import Quantity, exact
from effluent.domain.register import (
    Cleaner,
    CleanerForm,
    CleanerType,
    Company,
    CompanyRole,
    Container,
    ContainerKind,
    Engine,
    Person,
    Point,
    PointKind,
    Site,
)
from effluent.domain.sample import Fraction, Method, Qualifier, Result, Sample
from effluent.domain.wash import MeasuredBy, Movement, MovementKind, RunningMode, Wash, WashKind

__all__ = [
    "Bound",
    "BrokenBy",
    "Cleaner",
    "CleanerForm",
    "CleanerType",
    "Company",
    "CompanyRole",
    "Container",
    "ContainerKind",
    "Engine",
    "Fraction",
    "Limit",
    "Manifest",
    "ManifestLine",
    "ManifestState",
    "MeasuredBy",
    "Method",
    "Movement",
    "MovementKind",
    "NonDetectRule",
    "Outcome",
    "Person",
    "Point",
    "PointKind",
    "Qualifier",
    "Quantity",
    "Result",
    "Rounding",
    "RunningMode",
    "Sample",
    "Site",
    "Statistic",
    "Verdict",
    "Wash",
    "WashKind",
    "exact",
]
