"""Chebyshev series against NumPy's own and against pointwise evaluation, in doubles and over FLINT numbers."""

import numpy as np
from flint import acb
from hypothesis import given
from hypothesis import strategies as st
from numpy.polynomial import chebyshev as reference
from numpy.polynomial import polynomial

from knell.methods import chebyshev

# Coefficients of order one and at most twelve of them: rounding stays below 12² ulp of the sums, about 1e-13.
ROUNDING = 1e-13
SERIES = st.lists(st.complex_numbers(max_magnitude=1, allow_subnormal=False), min_size=3, max_size=12)


def as_complex(series):
    return np.array([complex(x) for x in series])


@given(SERIES)
def test_conversion_keeps_the_values(monomials):
    x = np.linspace(-1, 1, 7)
    converted = reference.chebval(x, chebyshev.from_monomials(monomials))
    assert abs(converted - polynomial.polyval(x, monomials)).max() < ROUNDING


@given(SERIES, SERIES)
def test_products_by_matrix_and_by_laurent_polynomial(a, b):
    expected = reference.chebmul(a, b)
    matrix = chebyshev.product_matrix(a, len(expected), len(b))
    assert abs(matrix @ np.array(b) - expected).max() < ROUNDING
    product = chebyshev.laurent([acb(x) for x in a]) * chebyshev.laurent([acb(x) for x in b])
    series = chebyshev.from_laurent(product, len(a) + len(b) - 2, len(expected))
    assert abs(as_complex(series) - expected).max() < ROUNDING


@given(SERIES)
def test_antiderivatives_differ_from_numpy_by_a_constant(a):
    expected = reference.chebint(a)[1:]
    matrix = chebyshev.integration_matrix(len(a) + 1, len(a))
    assert abs((matrix @ np.array(a))[1:] - expected).max() < ROUNDING
    # the FLINT form wants one coefficient more than it returns, and two beyond the last non-zero one here
    padded = [acb(x) for x in a] + [acb(0)] * 2
    assert abs(as_complex(chebyshev.antiderivative(padded, len(a) + 1))[1:] - expected).max() < ROUNDING
