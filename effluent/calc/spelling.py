"""How laboratories and crews write units: the text of a unit becomes a name the registry knows, and a kind.

Only spellings live here, no factors. Text is matched against a closed list, so nothing a user typed is
ever evaluated.
"""

from __future__ import annotations

import re
import unicodedata
from collections import Counter
from functools import lru_cache
from typing import NamedTuple

from effluent.errors import UnitUnknown

__all__ = ["UnitName", "read_unit"]

_LONGEST = 40
_MOST_PARTS = 6
_REMEDY = "write it as in mg/L, ug/L, mg/kg, uS/cm, degC, s.u., %, L, gal, m3, kg, lb, kg/L, lb/day or MGD"


class UnitName(NamedTuple):
    """A unit as the registry names it, and what it measures (a key of `effluent.calc.units.KINDS`)."""

    name: str
    kind: str


# dimension, registry name, spellings
_ATOMS = (
    ("mass", "nanogram", "ng nanogram nanograms"),
    ("mass", "microgram", "ug mcg microgram micrograms"),
    ("mass", "milligram", "mg milligram milligrams"),
    ("mass", "gram", "g gram grams"),
    ("mass", "kilogram", "kg kgs kilogram kilograms"),
    ("mass", "metric_ton", "t tonne tonnes metric_ton metric_tons"),
    ("mass", "short_ton", "short_ton short_tons"),
    ("mass", "pound", "lb lbs pound pounds"),
    ("mass", "ounce", "oz_av"),
    ("volume", "microliter", "uL ul microlitre microliter"),
    ("volume", "milliliter", "mL ml cc millilitre milliliter millilitres milliliters"),
    ("volume", "centiliter", "cL cl"),
    ("volume", "deciliter", "dL dl"),
    ("volume", "liter", "L l litre liter litres liters"),
    ("volume", "hectoliter", "hL hl"),
    ("volume", "kiloliter", "kL kl"),
    ("volume", "gallon", "gal gals gallon gallons US_gal US_gals US_gallon US_gallons"),
    ("volume", "megagallon", "Mgal MGal"),
    (
        "volume",
        "imperial_gallon",
        "imp_gal imperial_gal imp_gallon imp_gallons imperial_gallon imperial_gallons",
    ),
    ("volume", "quart", "qt qts quart quarts US_qt"),
    ("volume", "US_pint", "US_pt US_pint"),
    ("volume", "US_fluid_ounce", "US_fl_oz"),
    ("length", "meter", "m metre meter"),
    ("length", "decimeter", "dm"),
    ("length", "centimeter", "cm"),
    ("length", "millimeter", "mm"),
    ("length", "inch", "in inch"),
    ("length", "foot", "ft foot"),
    ("length", "yard", "yd yard"),
    ("time", "day", "d day days"),
    ("time", "hour", "h hr hour hours"),
    ("time", "minute", "min minute minutes"),
    ("time", "second", "s sec second seconds"),
    ("conductance", "siemens", "S siemens mho mhos"),
    ("conductance", "millisiemens", "mS mmho mmhos"),
    ("conductance", "microsiemens", "uS umho umhos"),
    ("temperature", "degree_Celsius", "degC °C C celsius deg_C"),
    ("temperature", "degree_Fahrenheit", "degF °F F fahrenheit deg_F"),
    ("temperature", "kelvin", "K kelvin"),
    ("pH", "standard_unit", "SU pH s.u."),
    ("share", "share_percent", "% percent pct"),
    ("turbidity", "nephelometric_unit", "NTU"),
)
_SPELLED = {text: (dim, name) for dim, name, texts in _ATOMS for text in texts.split()}
_AMBIGUOUS = {
    "oz": "an ounce of mass or of volume? write oz_av or US_fl_oz",
    "fl_oz": "US or imperial? write US_fl_oz, or use mL",
    "pt": "US or imperial? write US_pt, or use L",
    "ton": "write t for 1000 kg or short_ton for 2000 lb",
    "tons": "write t for 1000 kg or short_ton for 2000 lb",
    "T": "write t for 1000 kg or short_ton for 2000 lb",
    "G": "write g for gram or gal for the US gallon",
    "MG": "write mg for milligram or Mgal for a million US gallons",
    "Mg": "write mg for milligram or t for 1000 kg",
    "ML": "write mL for millilitre or, for a megalitre, 1000 times the number in m3",
    "Ml": "write mL for millilitre or, for a megalitre, 1000 times the number in m3",
    "k": "write kg, or K for kelvin",
    "ppt": "parts per thousand or per trillion? write g/kg or ng/kg",
    "month": "months differ in length; write the amount per day, or the mass alone",
    "ppmv": "parts by volume are not kept; ask the laboratory for mg/L",
    "ppbv": "parts by volume are not kept; ask the laboratory for ug/L",
    "mol": "laboratory readings are kept by mass; ask the laboratory for mg/L",
}
_FOLDED = {text.casefold(): found for text, found in _SPELLED.items() if text not in {"S", "K"}}
_FOLDED |= {"su": ("pH", "standard_unit")}

# Whole units whose spelling is not a plain ratio, in lower case.
_WHOLE = {
    "mg/l": "mg/L",
    "mg/kg": "mg/kg",
    "g/l": "g/L",
    "ppm": "mg/kg",
    "ppb": "ug/kg",
    "s.u.": "SU",
    "s.u": "SU",
    "std units": "SU",
    "std unit": "SU",
    "std. units": "SU",
    "standard units": "SU",
    "standard unit": "SU",
    "ph units": "SU",
    "ph unit": "SU",
}
_FLOWS = {"mgd": "Mgal/d", "gpd": "gal/d", "gpm": "gal/min"}
_MEASURED = {
    "mass": "mass",
    "volume": "volume",
    "mass/volume": "concentration",
    "mass/mass": "mass ratio",
    "volume/volume": "volume ratio",
    "mass/time": "load",
    "volume/time": "flow",
    "conductance/length": "conductivity",
    "temperature": "temperature",
    "pH": "pH",
    "share": "share",
    "turbidity": "turbidity",
}
# Mass per volume is a density where the trade writes densities so; anything else is a concentration.
_DENSITIES = {
    "kilogram/liter",
    "kilogram/meter**3",
    "gram/milliliter",
    "gram/centimeter**3",
    "pound/gallon",
    "pound/imperial_gallon",
    "pound/foot**3",
}
_PART = re.compile(
    r"(?P<join>/|\*|·| per | )?(?P<atom>[A-Za-z_°%.]+?)(?:(?:\^|\*\*)?(?P<power>-?[1-3]))?(?=[/*· ]|$)"
)


@lru_cache(maxsize=1024)
def read_unit(written: str) -> UnitName:
    """Return the registry's name and the kind of a unit as somebody wrote it.

    Parameters
    ----------
    written : str
        As in ``mg/L``, ``µg/l``, ``mg L-1``, ``lb/day``, ``US gal``, ``m³`` or ``MGD*mg/L``.

    Returns
    -------
    UnitName
        A text that holds nothing but names known to the registry, and the kind.

    Raises
    ------
    UnitUnknown
        If the text is no unit, or could mean two.

    Examples
    --------
    >>> read_unit("µg/l")
    UnitName(name='microgram/liter', kind='concentration')
    """
    if len(written) > _LONGEST:
        raise UnitUnknown(written[:_LONGEST] + "…", _REMEDY)
    if not written.strip():
        raise UnitUnknown(written, "a number without its unit is not a reading; " + _REMEDY)
    over, under = _fractions(_plain(written), written)
    name = "*".join(name for _, name in over) + "".join(f"/{name}" for _, name in under)
    return UnitName(name, _kind(over, under, written, name))


def _plain(written: str) -> str:
    """Return the text with one form of micro, minus, powers and white space."""
    text = unicodedata.normalize("NFKC", written).replace("\u03bc", "u").replace("\u2212", "-")
    text = re.sub(r" *([/*·]) *", r"\1", " ".join(text.split()))
    text = re.sub(r"\b(US|us|imp|Imp|imperial|fl|deg|metric|short) (?=[A-Za-z])", r"\1_", text)
    text = re.sub(r"(?i)\b(?:mgd|gpd|gpm)\b", lambda word: _FLOWS[word[0].casefold()], text)
    return _WHOLE.get(text.casefold(), text)


def _fractions(text: str, written: str) -> tuple[list[tuple[str, str]], list[tuple[str, str]]]:
    """Return (dimension, name) of what stands over and under the line."""
    over: list[tuple[str, str]] = []
    under: list[tuple[str, str]] = []
    start = 0
    while start < len(text):
        part = _PART.match(text, start)
        if part is None or len(over) + len(under) == _MOST_PARTS or bool(part["join"]) != bool(start):
            raise UnitUnknown(written, _REMEDY)
        power = int(part["power"] or 1)
        below = (part["join"] or "").strip() in {"/", "per"}
        (under if below != (power < 0) else over).extend(_atoms(part["atom"], abs(power), written))
        start = part.end()
    return over, under


def _atoms(text: str, power: int, written: str) -> list[tuple[str, str]]:
    """Return what one spelling with a power names: a length to the third is a volume."""
    dimension, name = _atom(text.removesuffix(".") or text, written)
    if dimension == "length" and power == 3:
        return [("volume", f"{name}**3")]
    if power != 1:
        raise UnitUnknown(written, _REMEDY)
    return [(dimension, name)]


def _atom(text: str, written: str) -> tuple[str, str]:
    if text in _AMBIGUOUS or (text.casefold() in _AMBIGUOUS and text not in _SPELLED):
        raise UnitUnknown(written, _AMBIGUOUS.get(text) or _AMBIGUOUS[text.casefold()])
    found = _SPELLED.get(text) or _FOLDED.get(text.casefold())
    if found is None:
        raise UnitUnknown(written, _REMEDY)
    return found


def _kind(over: list[tuple[str, str]], under: list[tuple[str, str]], written: str, name: str) -> str:
    """Return what is measured; in a product such as flow times concentration equal dimensions cancel."""
    above, below = Counter(dim for dim, _ in over), Counter(dim for dim, _ in under)
    if len(over) + len(under) > 2:
        above, below = above - below, below - above
    signature = "/".join("*".join(sorted(side.elements())) for side in (above, below) if side)
    if signature not in _MEASURED or not above:
        raise UnitUnknown(written, _REMEDY)
    return "density" if name in _DENSITIES else _MEASURED[signature]
