"""Needs mpmath, which no test and nothing in the package uses: python3 -m pip install mpmath.

Recompute rows of the distribution fixtures with mpmath, by another route than the package takes.

The package tabulates P(R > r) and sums over log s; here the scatter s itself is integrated by tanh-sinh
quadrature and the law is computed anew at each node by a fine sum over z. A minute or two a row:
python tests/reference/make/distributions.py [every-nth-row].
"""

import json
import sys
from pathlib import Path

import mpmath as mp

DATA = Path(__file__).parent.parent / "data"
mp.mp.dps = 40


def phi(z):
    return mp.exp(-z * z / 2) / mp.sqrt(2 * mp.pi)


def tail(z):
    return mp.erfc(z / mp.sqrt(2)) / 2


def sum_over_z(f, centre, step):
    """Trapezoid sum over a window that holds the bulk and the tail peak of every statistic of interest."""
    half = int((centre + 10) / step)
    return step * mp.fsum(f(centre + j * step) for j in range(-half, half + 1))


def range_tail(r, k):
    def f(z):
        share = tail(r - z) / tail(-z)
        return phi(z) * tail(-z) ** (k - 1) * -mp.expm1((k - 1) * mp.log1p(-share))

    return k * sum_over_z(f, r / 2, mp.mpf(1) / 8)


def modulus_tail(m, k):
    return -mp.expm1(k * mp.log1p(-mp.erfc(m / mp.sqrt(2)))) if m > 0 else mp.mpf(1)


def many_to_one_tail(t, n0, ni, two):
    def f(z):
        log_none = mp.mpf(0)
        for n in ni:
            load = mp.sqrt(mp.mpf(n) / (n0 + n))
            width = mp.sqrt(1 - load**2)
            out = tail((t - load * z) / width) + (tail((t + load * z) / width) if two else 0)
            log_none += mp.log1p(-out)
        return phi(z) * -mp.expm1(log_none)

    widest = max(ni)
    return sum_over_z(f, t / 2, mp.sqrt(mp.mpf(n0) / (n0 + widest)) / 5)


def studentised(law, q, df):
    """Integrate law(q s) over s, df s**2 chi-squared on df."""
    if df == mp.inf:
        return law(q)
    constant = 2 * (df / 2) ** (df / 2) / mp.gamma(df / 2)
    centre = 1 / mp.sqrt(1 + q * q / (2 * df))
    width = centre / mp.sqrt(2 * df)
    cuts = sorted(
        {mp.mpf(0), *(max(mp.mpf(0), centre + c * width) for c in (-12, -6, -3, 0, 3, 6, 12, 40, 120))}
    )
    return mp.quad(
        lambda s: constant * s ** (df - 1) * mp.exp(-df * s * s / 2) * law(q * s), cuts, maxdegree=5
    )


def check(name, every, value):
    rows = json.loads((DATA / f"{name}.json").read_text())["rows"]
    for row in rows[::every]:
        expected = mp.mpf(row["sf"])
        print(name, row, mp.nstr(value(row) / expected - 1, 3), flush=True)


def main():
    every = int(sys.argv[1]) if len(sys.argv) > 1 else 60
    mp.mp.dps = 18
    check(
        "maximum_modulus",
        every,
        lambda r: studentised(lambda x: modulus_tail(x, r["k"]), mp.mpf(r["m"]), mp.mpf(str(r["df"]))),
    )
    check(
        "many_to_one",
        max(every // 6, 1),
        lambda r: studentised(
            lambda x: many_to_one_tail(x, r["n0"], r["ni"], r["two"]), mp.mpf(r["q"]), mp.mpf(str(r["df"]))
        ),
    )
    check(
        "studentized_range",
        every,
        lambda r: studentised(lambda x: range_tail(x, r["k"]), mp.mpf(r["q"]), mp.mpf(str(r["df"]).lower())),
    )


if __name__ == "__main__":
    main()
