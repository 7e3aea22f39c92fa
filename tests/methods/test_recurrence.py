"""Series of known functions: the Airy equation, and an asymptotic series beyond its reach."""

import pytest
from flint import acb, arb, ctx

from knell.methods.recurrence import SeriesError, summed


def test_airy_function_from_its_recurrence():
    # y'' = x y:  k(k-1) a_k = a_(k-3)
    columns = [(acb(0), acb(0), acb(0)), (acb(0), acb(0), acb(0)), (acb(0), acb(0), acb(-1))]
    with ctx.workprec(200):
        value, slope, *_ = acb(0).airy_ai(), acb(0).airy_ai(derivative=1)
        x = acb(arb("1.25"), arb("-0.5"))
        found, weighted = summed(columns, acb(1), lambda k: k * (k - 1), [value, slope * x, acb(0)], x, 200)
        # about 40 terms of size 1, each rounded once: 2^-200 times some tens
        assert abs(found - x.airy_ai()) < arb(2) ** -190
        assert abs(weighted / x - x.airy_ai(derivative=1)) < arb(2) ** -190


def test_asymptotic_series_stalls_where_it_cannot_reach_the_precision():
    # Σ k! x^k, smallest term exp(-1/x): 6e-5 at x = 1/8 … 1e-52 at 1/120
    columns = [(acb(0), acb(-1), acb(0))]
    with ctx.workprec(120):
        with pytest.raises(SeriesError, match="stalls"):
            summed(columns, acb(1), lambda k: 1, [acb(1)], acb(1) / 8, 120, asymptotic=True)
        value, _ = summed(columns, acb(1), lambda k: 1, [acb(1)], acb(-1) / 120, 120, asymptotic=True)
        # Σ k! (-x)^k ~ (1/x) e^(1/x) E1(1/x)
        exact = 120 * arb(120).exp() * arb(120).expint(1)
        assert abs(value - exact) < arb(2) ** -112
