"""Words of headings that tell what a column holds, in the languages that instruments speak most."""

from __future__ import annotations

import re
import unicodedata
from typing import Final


def _set(text: str) -> frozenset[str]:
    return frozenset(text.split())


GROUP: Final = _set(
    "batch batches lot charge chargen chg partie los lote lotto lotnr lotno batchno batchnr batchid lotid"
)
WEAK_GROUP: Final = _set("group gruppe grp serie series product produkt code formulation rezeptur")
LINE: Final = _set("line linie linea ligne anlage plant machine reactor reaktor")
SAMPLE: Final = _set("sample samples specimen probe prüfkörper coupon vial muestra échantillon sampleid id")
REPLICATE: Final = _set("replicate replicates rep reps repeat reading run wiederholung messung")
TIME: Final = _set("time date datum zeit uhrzeit timestamp tested measured fecha datetime when")
STATUS: Final = _set("status valid state flag gültig ok bewertung judgement usable excluded")
RESULT: Final = _set("result results value values wert messwert ergebnis reading resultat measured")
VALUE: Final = _set(
    "strength shear peel tensile viscosity viskosität monomer hardness modulus elongation adhesion tack "
    "density dichte festigkeit scherfestigkeit schälkraft zugfestigkeit content assay purity ph moisture "
    "residue solids cohesion yield stress toughness recovery conductivity concentration gehalt härte"
)
DECOY: Final = _set(
    "width length thickness height diameter area load force weight mass temperature temp humidity rh speed "
    "rate dose position row no nr number index rig operator analyst channel breite länge dicke kraft last "
    "fläche temperatur feuchte gewicht masse bench overlap gap age duration depth volume"
)
SUMMARY: Final = (
    "mean", "average", "avg", "overall mean", "grand mean", "std dev", "stdev", "std", "st dev", "sd",
    "standard deviation", "rsd", "cv", "cv %", "min", "max", "minimum", "maximum", "median", "total", "sum",
    "range", "variance", "mittelwert", "standardabweichung", "mw", "stabw",
)  # fmt: skip
MISSING: Final = frozenset(("n/a", "na", "-", "--", "---", "n.a.", "missing", "none", "nan", "?", "k.a."))
NOT_DETECTED: Final = frozenset(("n.d.", "nd", "n. d.", "not detected", "<lod", "n.n.", "bdl"))
UNIT_KEYS: Final = _set("unit units einheit unidad")
NAME_KEYS: Final = _set("test characteristic property parameter quantity analysis prüfung merkmal")

_WORD = re.compile(r"[^\W\d_]+")


def words(heading: str) -> frozenset[str]:
    """Return the words of a heading in lower case."""
    return frozenset(_WORD.findall(heading.casefold()))


def kind_of(stem: str) -> str:
    """Return what names of exports of one kind have in common: the numbers that end the name are left out."""
    return re.sub(r"[\s_.-]*[0-9][0-9\s_.-]*$", "", stem) or stem


def slug(text: str, fallback: str) -> str:
    """Return a name of small ASCII letters, digits and underscores."""
    plain = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode().lower()
    return re.sub(r"[^a-z0-9]+", "_", plain).strip("_")[:40].strip("_") or fallback
