"""Deutsch: die Begründungen der mitgelieferten Regeltafeln. German: the shipped tables' reasons by row."""

from __future__ import annotations

from typing import Final

_NOT_SHOWN: Final = "Dass die Streuung ähnlich ist, ist nicht gezeigt"
_RANKS: Final = "Manche Ergebnisse sind nur als Schranke bekannt; Ränge nutzen sie, ohne Zahlen zu erfinden."

DEFAULT: Final[dict[str, str]] = {
    "too_few_groups": "Weniger als zwei Gruppen haben genug Ergebnisse; sie werden beschrieben.",
    "no_variation": (
        "Keine Gruppe streut überhaupt, es gibt also keine Streuung, gegen die ein Unterschied zu "
        "halten wäre; "
        "die Gruppen werden beschrieben."
    ),
    "censored_with_reference": _RANKS,
    "censored_every_pair": _RANKS,
    "reference_similar": (
        "Jede Gruppe wird mit der Referenz verglichen und die Streuung gilt als ähnlich: die Streuung aller "
        "Gruppen wird zusammengefasst, mit der genauen Verteilung für diese Umfänge."
    ),
    "reference_unequal_spread": (
        f"{_NOT_SHOWN}; bei zehn oder mehr Ergebnissen je Gruppe und höchstens neun Vergleichen nutzt jeder "
        "Vergleich die Streuung seiner beiden Gruppen."
    ),
    "reference_unequal_spread_small": (
        f"{_NOT_SHOWN} und eine Gruppe ist klein oder die Vergleiche sind viele: die Freiheitsgrade "
        "jeder Gruppe "
        "zählen nach ihrem Anteil an der Varianz."
    ),
    "similar_equal_sizes": (
        "Jedes Paar wird verglichen, die Streuung gilt als ähnlich und alle Gruppen sind gleich groß."
    ),
    "similar_unequal_sizes": (
        "Jedes Paar wird verglichen, die Streuung gilt als ähnlich und die Umfänge sind verschieden."
    ),
    "unequal_spread_tiny": (
        f"{_NOT_SHOWN} und eine Gruppe hat vier oder weniger Ergebnisse: nur dieses Verfahren hält dort die "
        "Fehlerrate, zum Preis geringerer Schärfe."
    ),
    "unequal_spread_small_many": (
        f"{_NOT_SHOWN} und es sind mehr als zehn Gruppen, manche mit weniger als zehn Ergebnissen."
    ),
    "unequal_spread_small": f"{_NOT_SHOWN} und eine Gruppe hat weniger als zehn Ergebnisse.",
    "unequal_spread_many": f"{_NOT_SHOWN} und es sind mehr als sechs Gruppen.",
    "unequal_spread": (
        f"{_NOT_SHOWN}; jede Gruppe hat zehn oder mehr Ergebnisse und es sind höchstens sechs Gruppen."
    ),
}

FACTS: Final[dict[str, str]] = {
    "comparison": "Vergleich",
    "groups": "Gruppen",
    "smallest_n": "kleinstes n",
    "sizes": "Umfänge",
    "variation": "Schwankung",
    "censored": "Schranken",
    "spread": "Streuung",
    "scale": "Maßstab",
}
VALUES: Final[dict[str, str]] = {
    "every pair": "jedes Paar",
    "each with the reference": "jede mit der Referenz",
    "equal": "gleich",
    "unequal": "verschieden",
    "some": "manche",
    "none": "keine",
    "similar": "ähnlich",
    "different": "verschieden",
    "cannot be judged": "nicht beurteilbar",
    "conflict": "Widerspruch",
    "as measured": "wie gemessen",
    "log": "Logarithmus",
}
SOURCES: Final[dict[str, str]] = {"Comparison plan": "Vergleichsplan", "Export": "Export"}
