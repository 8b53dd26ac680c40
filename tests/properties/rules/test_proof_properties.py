"""A table loads exactly where it is total and no row is dead, found here by trying every combination."""

from __future__ import annotations

import itertools

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from qcreport.errors import ConfigError
from qcreport.rules import parse_rules

HEAD = 'name = "own"\ntitle = "Own"\n[spread]\npolicy = "shown or declared"\n'
ROW = '[[row]]\nid = "r{i}"\nwhen = {{ {when} }}\nprocedure = "none"\nreason = "R."\nsource = "S."\n'
RELATIONS = {
    "<": int.__lt__,
    "<=": int.__le__,
    ">": int.__gt__,
    ">=": int.__ge__,
    "=": int.__eq__,
}
SPREADS = ("similar", "different", "cannot be judged", "conflict")
SIZES = ("equal", "unequal")
NUMBERS = range(9)

CONDITIONS = st.fixed_dictionaries(
    {},
    optional={
        "spread": st.sampled_from(SPREADS),
        "sizes": st.sampled_from(SIZES),
        "groups": st.tuples(st.sampled_from(sorted(RELATIONS)), st.integers(0, 7)),
    },
)


def holds(row: dict[str, object], facts: dict[str, object]) -> bool:
    for fact, wanted in row.items():
        here = facts[fact]
        if isinstance(wanted, tuple):
            relation, bound = wanted
            if not RELATIONS[relation](here, bound):
                return False
        elif here != wanted:
            return False
    return True


def text_of(row: dict[str, object]) -> str:
    parts = [f'{f} = "{"".join(map(str, w)) if isinstance(w, tuple) else w}"' for f, w in row.items()]
    return ", ".join(parts)


@settings(deadline=None, max_examples=60)
@given(rows=st.lists(CONDITIONS, min_size=1, max_size=6), closed=st.booleans())
def test_it_loads_exactly_where_it_is_total_and_every_row_can_apply(
    rows: list[dict[str, object]], closed: bool
) -> None:
    rows = [*rows, {}] if closed else rows
    deciding = []
    for spread, sizes, groups in itertools.product(SPREADS, SIZES, NUMBERS):
        facts = {"spread": spread, "sizes": sizes, "groups": groups}
        deciding.append(next((i for i, row in enumerate(rows) if holds(row, facts)), None))
    dead = set(range(len(rows))) - set(deciding)
    data = (HEAD + "".join(ROW.format(i=i, when=text_of(row)) for i, row in enumerate(rows))).encode()
    expected = {f"row[{i + 1}].when" for i in dead} | ({"row"} if None in deciding else set())
    if not expected:
        assert len(parse_rules(data, "own.toml").rows) == len(rows)
        return
    with pytest.raises(ConfigError) as caught:
        parse_rules(data, "own.toml")
    faults = caught.value.faults
    assert {f.key for f in faults} == expected
    assert all(f.file == "own.toml" and f.line is not None for f in faults)
    named = " ".join(f.text for f in faults)
    assert all(f"row 'r{i}'" in named for i in dead)
