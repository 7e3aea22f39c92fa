"""Sabotage: each bound weakened, each check dropped, and the probe that must notice.

The enclosure package is imported afresh with one line of its source changed. Probes are small forms of the tests
beside this file; with nothing changed all of them pass. What is *not* noticed is what cannot do harm: a
coefficient of a series that is nudged, or a midpoint taken on the way, only makes the residual larger
(`test_a_wrong_coefficient_only_widens_the_ball`).
"""

from __future__ import annotations

import importlib.util
import sys
from contextlib import contextmanager
from fractions import Fraction
from importlib import import_module
from importlib.abc import Loader, MetaPathFinder

import mpmath
import pytest
from flint import acb, acb_poly, arb, ctx

PACKAGE = "knell.methods.enclosure"


class _Edited(Loader):
    """Loads one module from its source with a replacement that must occur exactly once."""

    def __init__(self, path: str, old: str, new: str) -> None:
        self.path, self.old, self.new = path, old, new

    def create_module(self, spec):
        return None

    def exec_module(self, module) -> None:
        with open(self.path, encoding="utf-8") as stream:
            source = stream.read()
        if source.count(self.old) != 1:
            raise RuntimeError(f"{self.old!r} occurs {source.count(self.old)} times: correct the sabotage")
        exec(compile(source.replace(self.old, self.new), self.path, "exec"), module.__dict__)


class _Finder(MetaPathFinder):
    def __init__(self, name: str, loader: _Edited) -> None:
        self.name, self.loader = name, loader

    def find_spec(self, fullname, path=None, target=None):
        if fullname == self.name:
            return importlib.util.spec_from_loader(fullname, self.loader, origin=self.loader.path)
        return None


@contextmanager
def edited(module: str, old: str, new: str):
    """The package with one edit, for as long as the block lasts."""
    path = importlib.util.find_spec(f"{PACKAGE}.{module}").origin
    kept = {name: sys.modules.pop(name) for name in list(sys.modules) if name.startswith(PACKAGE)}
    finder = _Finder(f"{PACKAGE}.{module}", _Edited(path, old, new))
    sys.meta_path.insert(0, finder)
    try:
        yield
    finally:
        sys.meta_path.remove(finder)
        for name in [name for name in sys.modules if name.startswith(PACKAGE)]:
            del sys.modules[name]
        sys.modules.update(kept)


def load(module: str):
    return import_module(f"{PACKAGE}.{module}")


def refuses(call) -> bool:
    try:
        call()
    except load("refusal").Refusal:
        return True
    return False


def problem(n=4, k="9/10", field="axial", ell=2):
    from knell.physics.background import PowerLaw

    return load("problem").Problem(PowerLaw(n, Fraction(k)), field, ell)


# ---- probes ---------------------------------------------------------------------------------------------------


def transport():
    """Sharp where the inequality is an equality, for each of the four entries and for the source."""
    lemmas = load("lemmas")
    drift, r, c, least, rho = 0.3, 1.1, 0.7, 0.5, 0.4
    pieces = [lemmas.Piece(acb(drift), acb(0), arb(r), arb(c), arb(least))] * 64
    system = mpmath.matrix([[drift, 1, 0], [c, r, rho / least], [0, 0, 0]])
    for start in ((1.0, 0.0), (0.0, 1.0), (0.0, 0.0)):
        source = rho if start == (0.0, 0.0) else 0.0
        value, slope = lemmas.transport((arb(start[0]), arb(start[1])), arb(source), pieces, arb(1) / 64)
        vector = mpmath.matrix([start[0], start[1] + drift * start[0], 1 if source else 0])
        exact = mpmath.expm(system) * vector
        assert exact[0] * (1 - 1e-12) <= float(value) <= exact[0] * 1.05
        assert (exact[1] + drift * exact[0]) * (1 - 1e-12) <= float(slope)
    once, _ = lemmas.transport((arb(0), arb(0)), arb(rho), pieces[:1], arb(1))
    assert float(once) >= (mpmath.expm(system) * mpmath.matrix([0, 0, 1]))[0] * (1 - 1e-12)
    fading = [lemmas.Piece(acb(0), acb(0), arb(-50), arb(0), arb(1))]
    _, slope = lemmas.transport((arb(0), arb(0)), arb(1), fading, arb(1))
    assert 0.02 * (1 - 1e-9) <= float(slope)
    jump = [lemmas.Piece(acb(x), acb(y), arb(-1), arb(1), arb(1)) for x, y in ((1.0, 0.5), (-2.0, 0.25))]
    _, slope = lemmas.transport((arb(1), arb(0)), arb(0), jump, arb(0))
    assert float(slope) >= (1 + 0.5) + (3 + 0.25) + (2 + 0.25) - 1e-9
    bent = [lemmas.Piece(acb(0), acb(0.5), arb(-1), arb(0), arb(1))]
    value, _ = lemmas.transport((arb(1), arb(0)), arb(0), bent, arb(1))
    assert float(value) >= float(mpmath.exp(0.5))


def regular():
    lemmas = load("lemmas")
    for m, alpha, c, g in ((5, 2.5, 0.0, 1.3), (5, 2.5, 14.0, 1.3), (2, 0.0, 8.0, 0.8)):
        a = {m + 1: mpmath.mpf(1) / (g * (m + 1) * (m + 1 - alpha))}
        for k in range(m + 2, m + 60):
            a[k] = c * a[k - 1] / (g * k * (k - alpha))
        value, slope = sum(a.values()), sum(k * x for k, x in a.items())
        bound, steep = lemmas.regular_tail(arb(1), arb(alpha), arb(c), arb(g), m)
        assert value * (1 - 1e-12) <= float(bound) and slope * (1 - 1e-12) <= float(steep)


def irregular():
    lemmas = load("lemmas")
    gamma, g, m = 1e5, 0.7, 3
    for share in (0.0, 0.6):
        c = share * gamma * g * (m + 2)
        rate = c / (gamma * g)
        e = mpmath.quad(lambda t, k=rate: mpmath.e ** (k * (1 - t)) * t**m / (gamma * g), [0, 1])
        bound, steep = lemmas.irregular_tail(arb(1), arb(gamma), arb(c), arb(g), m)
        assert e * (1 - 1e-3) <= float(bound)
        assert (c * e + 1) / (gamma * g) * (1 - 1e-3) <= float(steep)


def weak_bounds():
    lemmas = load("lemmas")
    assert refuses(lambda: lemmas.regular_tail(arb(1), arb(2), arb(0), arb(1), 1))
    assert refuses(lambda: lemmas.regular_tail(arb(1), arb(0), arb(7), arb(1), 1))
    assert refuses(lambda: lemmas.irregular_tail(arb(1), arb(-1), arb(0), arb(1), 1))
    assert refuses(lambda: lemmas.irregular_tail(arb(1), arb(1), arb(3), arb(1), 1))
    assert refuses(lambda: lemmas.regular_tail(arb("nan"), arb(0), arb(0), arb(1), 1))


def series():
    """Few terms hold many: a step, both kinds of start, with a factor cleared, and a model."""
    S, T, G, P = load("series"), load("taylor"), load("segment"), load("problem")
    fine_cut, hole, sigma = S.Cut(arb(10) ** -50), problem(), 0.5 + 0.6j

    def near(rough, fine, at=None):
        value = rough.value if at is None else rough.value(T.exact_point(at))
        slope = rough.slope if at is None else rough.slope(T.exact_point(at))
        assert bool((fine.value - value).abs_upper() <= rough.value_error + fine.value_error)
        assert bool((fine.slope - slope).abs_upper() <= rough.slope_error + fine.slope_error)

    def start(bits, ring, at_horizon, cut, cleared):
        x1 = 0.03 - 0.02j if at_horizon else 0.004 - 0.009j
        segment = G.Segment.at_singular_end(P.side(hole, bits, at_horizon), T.exact_point(x1))
        return S.singular_start(segment, ring, cut, not at_horizon, cleared)

    def step(bits, ring, cut, state):
        segment = G.Segment.at_ordinary_point(
            P.side(hole, bits, False), T.exact_point(0.3 - 0.2j), T.exact_point(0.12 + 0.05j)
        )
        return S.ordinary_step(segment, ring, state, cut)

    for at_horizon, cleared, order in ((False, (), 5), (True, (), 4), (True, (1, 2), 4), (True, (), 9)):
        with ctx.workprec(90):
            rough = start(90, T.Values(T.exact_point(sigma)), at_horizon, S.Cut(arb(1), order), cleared)
            disc = T.Models(T.exact_point(sigma), arb(1) / 32, 2)
            model = start(90, disc, at_horizon, S.Cut(arb(1), 14), cleared)
        with ctx.workprec(400):
            near(rough, start(400, T.Values(T.exact_point(sigma)), at_horizon, fine_cut, cleared))
            for tau in (1.0, -1.0, 1j):
                z = T.Values(T.exact_point(sigma + tau / 32))
                near(model, start(400, z, at_horizon, fine_cut, cleared), tau)
    data = S.State(acb(0.5), acb(-0.25, 0.5), arb(0), arb(0), 0)
    for order in (3, 8):
        with ctx.workprec(90):
            rough = step(90, T.Values(T.exact_point(sigma)), S.Cut(arb(1), order), data)
        with ctx.workprec(400):
            near(rough, step(400, T.Values(T.exact_point(sigma)), fine_cut, data))
    with ctx.workprec(30):
        # Rounding decides here: 30 bits, forty terms.
        coarse = step(30, T.Values(T.exact_point(sigma)), S.Cut(arb(1), 40), data)
    with ctx.workprec(400):
        near(coarse, step(400, T.Values(T.exact_point(sigma)), fine_cut, data))
    with ctx.workprec(90):
        disc = T.Models(T.exact_point(sigma), arb(1) / 8, 1)
        rough = step(90, disc, S.Cut(arb(1), 30), S.State(acb_poly([0.5]), acb_poly([-0.25]), arb(0), arb(0), 0))
        moved = S.State(acb(0.5), acb(-0.25), arb("0.011"), arb("0.022"), 0)
        shaken = step(90, T.Values(T.exact_point(sigma)), S.Cut(arb(1), 30), moved)
    with ctx.workprec(400):
        for tau in (1.0, -1.0, 1j, -1j):
            z = T.Values(T.exact_point(sigma + tau / 8))
            near(rough, step(400, z, fine_cut, S.State(acb(0.5), acb(-0.25), arb(0), arb(0), 0)), tau)
        other = S.State(acb("0.51"), acb("-0.27"), arb(0), arb(0), 0)
        near(shaken, step(400, T.Values(T.exact_point(sigma)), fine_cut, other))


def leading():
    """Remainders of the first coefficients, and what clearing a factor does to all of them."""
    S, T, G, P = load("series"), load("taylor"), load("segment"), load("problem")
    with ctx.workprec(200):
        segment = G.Segment.at_singular_end(P.side(problem(), 200, True), T.exact_point(0.03 - 0.02j))
        disc = T.Models(T.exact_point(0.5 + 0.6j), arb(1) / 4, 1)
        for known, cleared in ((4, ()), (4, (1, 3))):
            rough = S._leading_coefficients(segment, disc, S.factors(segment, disc), known, cleared)
            for tau in (1.0, -1.0, 1j):
                z = T.Values(T.exact_point(0.5 + 0.6j + tau / 4))
                fine = S._leading_coefficients(segment, z, S.factors(segment, z), known, cleared)
                plain = S._leading_coefficients(segment, z, S.factors(segment, z), known, ())
                factor = acb(1)
                for j in cleared:
                    factor *= 1 + 2 * z.sigma * segment.kappa[0] / (segment.P[1] * j)
                for a, b, c in zip(rough, fine, plain, strict=True):
                    assert a(T.exact_point(complex(tau))).contains(b.mid())
                    assert (c * factor).overlaps(b)


def residuals():
    """The sum of the residual's coefficients against polynomial algebra."""
    S, T, G, P = load("series"), load("taylor"), load("segment"), load("problem")
    with ctx.workprec(200):
        segment = G.Segment.at_ordinary_point(
            P.side(problem(), 200, False), T.exact_point(0.3 - 0.2j), T.exact_point(0.2 + 0.1j)
        )
        sigma = T.exact_point(0.5 + 0.6j)
        ring = T.Values(sigma)
        a = [acb(1, 2), acb(-1), acb(0.5, 0.25), acb(0, 1)]
        phi, p, kappa = acb_poly(a), acb_poly(list(segment.P)), acb_poly(list(segment.kappa))
        rest = sigma * kappa.derivative() - sigma * sigma * acb_poly(list(segment.q)) - acb_poly(list(segment.w))
        full = (p * phi.derivative()).derivative() + 2 * sigma * kappa * phi.derivative() + rest * phi
        rows = S.factors(segment, ring)
        k, row = next((k, row) for k, row in rows if k == 2)
        total = S._residual(ring, a, k, row, rows)
        exact = sum((c.abs_lower() for c in full.coeffs()[2:]), arb(0))
        assert bool(exact.lower() <= total) and bool(total < exact * arb("1.0001"))


def value():
    """The fundamental of n = 4, κ = 9/10 against 36 digits of direct integration in the complex r-plane."""
    C = load("certificate")
    one = C.prove_zero(problem(), 0.387259 - 0.0798796j, 24)
    re, im = Fraction(one.statement.frequency_re), Fraction(one.statement.frequency_im)
    off_re = abs(re - Fraction("0.387259113910133732239484145146573203673"))
    off_im = abs(im + Fraction("0.079879554413182671322529449037136468099"))
    assert off_re**2 + off_im**2 <= Fraction(one.statement.proven_radius) ** 2
    assert Fraction(one.statement.proven_radius) < Fraction(1, 10**24)


def suprema():
    G, T, P = load("segment"), load("taylor"), load("problem")
    cover = G.covering(16)
    assert cover[0].real.contains(0) and cover[-1].real.contains(1)
    with ctx.workprec(90):
        sigma, R = 0.9 + 0.6j, 0.5
        segment = G.Segment.at_ordinary_point(
            P.side(problem(), 90, False), T.exact_point(0.3 - 0.2j), T.exact_point(0.12 + 0.05j)
        )
        pieces = G.ordinary_pieces(segment, T.exact_point(sigma), arb(R))

        def at(part, xi):
            return sum((c * xi**i for i, c in enumerate(part)), acb(0))

        def slope(part, xi):
            return sum((i * c * xi ** (i - 1) for i, c in enumerate(part) if i), acb(0))

        for i, piece in enumerate(pieces):
            for tau in (0.0, 1.0, -1.0, 1j, -1j):
                for where in (0.0, 1.0):
                    xi, z = acb((i + where) / 16), T.exact_point(sigma + R * tau)
                    B = (2 * z * at(segment.kappa, xi) + slope(segment.P, xi)) / at(segment.P, xi)
                    C = z * slope(segment.kappa, xi) - z * z * at(segment.q, xi) - at(segment.w, xi)
                    C = C / at(segment.P, xi)
                    exponent = piece.slow + piece.bend * T.exact_point(complex(tau))
                    assert not bool((-(B + exponent)).real > piece.rate)
                    assert not bool(((B + exponent) * exponent + C).abs_lower() > piece.coupling)
                    assert not bool(at(segment.P, xi).abs_upper() < piece.least)
        end = G.Segment.at_singular_end(P.side(problem(), 90, True), T.exact_point(0.02 + 0.01j))
        disc = T.exact_point(sigma) + T.box(arb(R))
        alpha, gamma, c, least = G.singular_suprema(end, disc, 1)
        for xi in (acb(0), acb(1)):
            for tau in (1.0, -1.0, 1j, -1j):
                z = T.exact_point(sigma + R * tau)
                g = at(end.P[1:], xi)
                rate = (2 * z * at(end.kappa, xi) / g).real
                C = z * slope(end.kappa, xi) - z * z * at(end.q, xi) - at(end.w, xi)
                assert not bool(-rate > alpha) and not bool(rate < gamma)
                assert not bool(C.abs_lower() > c) and not bool(g.abs_upper() < least)


def models():
    T = load("taylor")
    with ctx.workprec(100):
        ring = T.Models(acb(0), arb(1), 2)
        for a, b in (([1, 2, 3], [3, -1, 2]), ([1, 1, 1], [1, 1, 1])):
            x, y = acb_poly(a), acb_poly(b)
            for tau in (acb(1), acb(-1), acb(0, 1)):
                assert ring.multiply(x, y)(tau).contains(x(tau) * y(tau))
                assert ring.divide(x, acb(3), acb(1))(tau).overlaps(x(tau) / (3 + tau))
                assert not bool((x(tau) / (3 + tau)).abs_upper() < 0)
        quotient = T.Models(acb(0), arb(1), 0).divide(acb_poly([1]), acb(1), acb(-0.5))
        assert quotient(acb(1)).contains(2) and quotient(acb(-1)).overlaps(acb(2) / 3)
        assert refuses(lambda: ring.divide(acb_poly([1]), acb(1), acb(1)))
        assert refuses(lambda: T.Values(acb(2)).divide(acb(1), acb(-4), acb(2)))
        assert refuses(lambda: T.Values(acb(1) / 3)) and refuses(lambda: T.Models(acb(1) / 3, arb(1), 2))
        assert refuses(lambda: T.upper(acb("nan"))) and refuses(lambda: T.lower(acb("nan")))
        assert refuses(lambda: ring.norm(acb_poly([acb("nan")])))
        assert T.box(arb(1)).contains(acb(1)) and T.box(arb(1)).contains(acb(0, 1))
        wide = acb_poly([acb(arb(1, 0.5), arb(0, 0.25)), acb(2)])
        middle, rest = ring.split(wide)
        assert bool((wide - middle)(acb(1)).abs_upper() <= rest)


def paths():
    """Foreign roots, other sheets and inexact ends are refused."""
    from knell.physics.background import PowerLaw

    H, E = load("path"), load("effort")
    hole = load("problem").Problem(PowerLaw.from_q(22, Fraction(1, 21)), "axial", 2)
    end = load("problem").MATCH_POINT
    sigma = 0.13 + 0.55j
    infinity, horizon = (
        H.plan(land, at, sigma, 30, H.Stride()) for land, at in zip(E.lands(hole), (False, True), strict=True)
    )
    over = (-0.02 - 0.05j, -0.12 - 0.35j, -0.1 - 0.5j, 0.3 - 0.5j, 1 - end)
    above = (*(v.conjugate() for v in infinity[:-1]), 0.5 + 0.1j, end)
    round_the_cut = (-0.1 - 0.01j, -0.1 + 0.1j, 0.1 + 0.1j, end)

    def check(left, right):
        with ctx.workprec(128):
            points = H.exact_vertices(left, False), H.exact_vertices(right, True)
            H.check_homotopy(hole.equation(128), *points, acb(arb(0.13), arb(0.55)))

    check(infinity, horizon)
    assert refuses(lambda: check(infinity, over))
    assert refuses(lambda: check(above, horizon))
    assert refuses(lambda: check(round_the_cut, horizon))
    assert refuses(lambda: H.exact_vertices((0.1j, 0.5 - 0.19j), False))
    assert refuses(lambda: H.exact_vertices((0.1j, complex(0.5, -0.1875 - 2**-50)), False))


def foreign_run():
    """The whole evaluation refuses a path that winds about a root: the check is made, and made for A and B alike."""
    from dataclasses import replace

    from knell.physics.background import PowerLaw

    E, T = load("effort"), load("taylor")
    hole = load("problem").Problem(PowerLaw.from_q(22, Fraction(1, 21)), "axial", 2)
    end = load("problem").MATCH_POINT
    run = E.prepare(hole, T.exact_point(0.13 + 0.55j), 0.0, E.Effort(8, 0, load("path").Stride(0.4, 10.0)))
    x1 = run.horizon.vertices[0]
    way = (x1, 1.5 * x1, -0.04 - 0.2j, -0.12 - 0.35j, -0.1 - 0.5j, 0.1 - 0.6j, 0.3 - 0.5j, 0.5 - 0.2j, 1 - end)
    land, vertices = E.lands(hole)[1], [way[0]]
    for there in way[1:]:
        while vertices[-1] != there:
            here = vertices[-1]
            drift = abs(2 * (0.13 + 0.55j) * E.horner(land.K, here) / E.horner(land.p, here))
            step = min(0.3 * min(abs(here - w) for w in land.singular), 4 / drift)
            far = abs(there - here)
            vertices.append(there if far <= step else here + (there - here) * step / far)
    over = replace(run, horizon=type(run.horizon)(tuple(vertices)))
    assert refuses(lambda: over.evaluate(hole))


def structure():
    from knell.physics.equation import regularised

    P = load("problem")
    with ctx.workprec(100):
        P.check_structure(regularised([arb(1), arb(-1)], "axial", 2, False))
        third = arb(1) / 3
        extremal = [arb(1), -(1 + third), arb(0), arb(0), third]
        for f, degenerate in (
            (extremal, False),
            ([arb(1), arb(-1)], True),
            ([arb(1), arb(-1), arb(0.001)], False),
            ([arb(1), arb(-3), arb(2)], False),
        ):
            assert refuses(lambda f=f, d=degenerate: P.check_structure(regularised(f, "axial", 2, d)))
        segment, T = load("segment").Segment, load("taylor")
        first = segment.at_singular_end(P.side(problem(), 100, True), T.exact_point(0.02 + 0.01j))
        assert refuses(lambda: load("segment").singular_suprema(first, acb(1), 2))
        across = segment.at_ordinary_point(P.side(problem(), 100, False), acb(0.9), acb(0.2))
        assert refuses(lambda: load("segment").ordinary_pieces(across, acb(1), arb(0)))


def schwarzschild_first():
    Z, E = load("one_zero"), load("effort")
    hole = problem(2, "0")
    first = Z.find_uniqueness(hole, 1j * (0.3736716844180418 - 0.0889623156889357j) / E.mass(hole))
    return Z, E, hole, first


def zeros():
    """What is no zero, what is displaced, and what belongs to another function are refused."""
    from dataclasses import replace

    Z, E, hole, first = schwarzschild_first()
    T, stride = load("taylor"), load("path").Stride
    effort = E.Effort(20, 0, stride(0.4, 10.0))
    with ctx.workprec(300):
        moved = Z.model_root(first) + acb(1e-6)
        far = (Z.model_root(first) + 2 * first.r_s).mid()
    zero, _ = Z.shrink(hole, first, E.prepare(hole, moved, 0.0, effort, first.run.cleared))
    assert float(zero.radius) >= 1e-6
    assert refuses(lambda: Z.shrink(hole, first, E.prepare(hole, far, 0.0, effort, first.run.cleared)))
    for omega in (0.5 - 0.3j, 0.01 - 0.45j, 0.3242 - 0.181j):
        run = E.prepare(hole, T.exact_point(2j * omega), 0.01, E.Effort(13, 12, stride(0.45, 3.5)))
        assert refuses(lambda run=run: Z.uniqueness(hole, run))
    assert refuses(lambda: Z.uniqueness(hole, first.run, 1.0))
    other = problem(4, "1/1000")
    root = Z.model_root(first)
    assert refuses(lambda: Z.shrink(other, first, E.prepare(other, root, 0.0, Z.value_effort(20))))
    assert refuses(lambda: Z.shrink(hole, first, E.prepare(hole, root, 0.0, effort, (1,))))
    few = E.prepare(hole, root, 0.0, effort)
    assert refuses(lambda: Z.shrink(hole, first, replace(few, bits=30)))


def two_zeros():
    """A disc that holds two zeros of a polynomial is not called a disc with one."""
    Z, M = load("one_zero"), load("mismatch")
    nothing = M.Route((), ())
    for coefficients, error in (([0.0, 0.1, 1.0], 0.0), ([0.5, 1.0], 0.0), ([0.0, 1.0], 0.9), ([0.0], 0.0)):
        found = M.Mismatch(acb_poly(coefficients), arb(error), nothing, nothing)
        sizes = [acb(c).abs_upper() for c in coefficients]
        assert not Z._rouche(found, sizes, arb(0.5))
    sharp = M.Mismatch(acb_poly([0.1, 1.0, 0.5]), arb(0.05), nothing, nothing)
    assert Z._rouche(sharp, [arb("0.1"), arb(1), arb(0.5)], arb(0.5))


def slopes():
    """μ bounds the difference quotients of P on r_s, and is positive."""
    *_, first = schwarzschild_first()
    scale = arb(first.run.radius)
    with ctx.workprec(200):
        polynomial, r_s = first.mismatch.value, first.r_s / scale
        for a, b in ((1, -1), (1j, -1j), (1, 1j), (-1, 1j)):
            x, y = (acb(arb(complex(t).real), arb(complex(t).imag)) * r_s for t in (a, b))
            quotient = (polynomial(x) - polynomial(y)) / (x - y) / scale
            assert bool(quotient.abs_lower() >= first.slope)
            # The share of η may not be forgotten: E may have this slope.
            room = first.mismatch.error / (1 - r_s) / scale
            assert bool(first.slope + room <= (polynomial[1] / scale).abs_upper())
            rest = sum((i * polynomial[i].abs_lower() * r_s ** (i - 1) for i in range(2, len(polynomial))), arb(0))
            assert bool((first.slope + room + rest / scale).lower() <= (polynomial[1] / scale).abs_upper())


def sides_of_the_axis():
    C, S = load("certificate"), load("statement")
    hole = problem(2, "0")
    continued = C.prove_zero(hole, -0.01532 - 1.99841j, 12)
    special = C.prove_zero(hole, -2j, 12)
    assert continued.statement.kind == "continued" and special.statement.kind == "clearing"
    assert refuses(lambda: S.state_mode(continued.zero, 12)) and refuses(lambda: S.state_mode(special.zero, 12))


def printing():
    Q = load("printed")
    for x in (0.1, 3.14159, 9.999999e-7, 1.0005):
        assert Fraction(Q.rounded_up(arb(x))) >= Fraction(x) >= Fraction(Q.rounded_down(arb(x)))
    assert Fraction(Q.rounded_up(arb(1, 0.5))) >= Fraction(3, 2) and Fraction(Q.rounded_down(arb(1, 0.5))) <= Fraction(
        1, 2
    )
    C = load("certificate")
    one = C.prove_zero(problem(), 0.387259 - 0.0798796j, 24)
    statement = load("statement").state(one.zero, 3)
    # Six decimals of the centre: the rounding must be inside the printed radius.
    off = abs(Fraction(statement.frequency_re) - Fraction("0.38725911391013373223948"))
    assert off > Fraction(1, 10**8) and Fraction(statement.proven_radius) >= off


def counting():
    """Two modes and the pole at -i/4, which only the cleared factor hides."""
    K, R = load("count"), load("region")
    region = R.Region(Fraction(1, 2), Fraction(7, 20), Fraction(1, 10), Fraction(1, 20))
    count = K.count_zeros(problem(2, "0"), region)
    assert count.number == 2
    seam = (count.edges[0].end[0] + Fraction(1, 10**15), count.edges[0].end[1])
    from dataclasses import replace

    broken = (replace(count.edges[0], end=seam), *count.edges[1:])
    for edges in (count.edges[1:], broken, count.edges * 2):
        assert refuses(lambda e=edges: K.total(region, e, count.cleared))
    wider = replace(region, re_max=region.re_max + Fraction(1, 10**9))
    assert refuses(lambda: K.total(wider, count.edges, count.cleared))
    first = count.edges[0]
    small = replace(first.run, radius=first.run.radius / 2)
    assert refuses(lambda: K.edge(problem(2, "0"), first.start, first.end, small, count.cleared))


def a_zero_on_an_edge():
    """An edge that passes through a mode is not resolved."""
    K, E, T = load("count"), load("effort"), load("taylor")
    hole = problem(2, "0")
    re, im = Fraction("0.37367168441804183579"), Fraction("-0.08896231568893569828")
    ends = (re - Fraction(1, 50), im), (re + Fraction(1, 50), im)
    sigma = complex(-float(im), float(re)) / E.mass(hole)
    run = E.prepare(hole, T.exact_point(sigma), 0.05, E.Effort(14, 14, load("path").Stride(0.45, 3.5)))
    assert refuses(lambda: K.edge(hole, *ends, run, (1, 2)))


def completeness():
    C, M, K, R = load("certificate"), load("mismatch"), load("count"), load("region")
    hole = problem(2, "0")
    region = R.Region(Fraction(1, 2), Fraction(7, 20), Fraction(1, 10), Fraction(1, 20))
    one, again, deep = (
        C.prove_zero(hole, w, 12) for w in (0.3736717 - 0.0889623j, 0.374 - 0.089j, 0.3010535 - 0.478277j)
    )
    count = K.Count(region, 2, (1,), ())
    for found in ([one], [one, again], [one, deep]):
        assert refuses(lambda f=found: C.complete(hole, count, f))
    assert M is not None


def records():
    import json

    C, R = load("certificate"), load("record")
    one = C.prove_zero(problem(2, "0"), 0.3736717 - 0.0889623j, 12)
    text = json.dumps(R.zero_document(one))
    assert R.recheck_zero(json.loads(text)).statement == one.statement
    for change in (
        lambda d: d["claim"].update(proven_radius="1e-40"),
        lambda d: d["claim"].update(unique_radius="0.5"),
        lambda d: d["claim"].update(frequency_re="0.373671684418043"),
        lambda d: d.update(match_point=[0.5, -0.2]),
        lambda d: d["value"]["horizon"]["orders"].pop(),
        lambda d: d["uniqueness"].update(share=1.0),
    ):
        document = json.loads(text)
        change(document)
        assert refuses(lambda d=document: R.recheck_zero(d))


def special_zeros():
    from knell.physics.background import PowerLaw

    L, P = load("clearing"), load("problem")
    for background, j in ((PowerLaw(2, Fraction(0)), 8), (PowerLaw.from_q(4, Fraction(1, 7)), 4)):
        hole = P.Problem(background, "axial", 2)
        assert [i for i in range(1, 10) if L.vanishes_exactly(hole, i)] == [j]


def stability():
    from knell.physics.background import PowerLaw

    G, P = load("growing"), load("problem")
    assert G.potential_is_not_negative(P.Problem(PowerLaw(8, Fraction(1)), "scalar", 0))
    assert not G.potential_is_not_negative(P.Problem(PowerLaw.from_q(8, Fraction(-3, 5)), "axial", 2))


PROBES = [
    *(leading, residuals),
    *(transport, regular, irregular, weak_bounds, series, value, suprema, models, paths, foreign_run, structure),
    *(zeros, two_zeros, slopes, sides_of_the_axis, printing, counting, a_zero_on_an_edge, completeness, records),
    *(special_zeros, stability),
]

# Module, line as it stands, line as sabotaged, and the probe that must fail.
SABOTAGES = [
    # A factor, an index or a term of a lemma.
    ("lemmas", "(down + g * (drift - low)) * value + g * excess", "g * excess", transport),
    ("lemmas", "* value + g * excess + source * integral_g", "* value + source * integral_g", transport),
    ("lemmas", "g * excess + source * integral_g", "g * excess", transport),
    ("lemmas", "c * g * value + (down", "(down", transport),
    ("lemmas", "(down + g * (r - low)) * excess", "down * excess", transport),
    ("lemmas", "source * (integral_down + (r - low) * integral_g)", "source * integral_g", transport),
    ("lemmas", "integral_down.min(-1 / low)", "integral_down.min(-1 / (2 * low))", transport),
    ("lemmas", "_above(piece.slow.real + abs(piece.bend)", "_above(piece.slow.real", transport),
    ("lemmas", "excess = excess + ((piece.slow - slow).abs_upper()", "excess = excess + (arb(0)", transport),
    ("lemmas", "+ (piece.bend - bend).abs_upper()) * value", ") * value", transport),
    ("lemmas", "excess + (slow.abs_upper() + bend.abs_upper()) * value", "excess", transport),
    ("lemmas", "delta = ((drift - r) ** 2 + 4 * c).sqrt()", "delta = ((drift - r) ** 2 + 2 * c).sqrt()", transport),
    ("lemmas", "rho / _positive(piece.least", "rho / 2 / _positive(piece.least", transport),
    ("lemmas", "flux / (least * (m + 1))", "flux / (least * (m + 2))", regular),
    ("lemmas", "flux = rho / (room * d)", "flux = rho / ((m + 1) * d)", regular),
    ("lemmas", "1 - c / (least * (m + 1) * (room + 1))", "1 - 0 * c / (least * (m + 1) * (room + 1))", regular),
    ("lemmas", '_above(flux / least, "the tail")', '_above(flux / least / (m + 1), "the tail")', regular),
    ("lemmas", "value = rho / (weight * (m + 1) * d)", "value = rho / (weight * (m + 2) * d)", irregular),
    ("lemmas", "d = _positive(1 - c / (weight * (m + 2))", "d = _positive(1 - c / (weight * (m + 9))", irregular),
    ("lemmas", "(c * value + rho) / weight", "rho / weight", irregular),
    ("lemmas", "if not bool(bound > 0):", "if False:", weak_bounds),
    # A supremum that forgets the σ disc, a piece, or a term.
    (
        "segment",
        "b0, b1 = (2 * centre * k + p_slope(xi)) / p, 2 * radius * k / p",
        "b0, b1 = (2 * centre * k + p_slope(xi)) / p, 0 * k",
        suprema,
    ),
    (
        "segment",
        "(fast * slow + c0, fast * bend + fast_bend * slow + c1, fast_bend * bend + c2)",
        "(fast * slow + c0,)",
        suprema,
    ),
    ("segment", "for i in range(pieces)]", "for i in range(pieces - 1)]", suprema),
    ("segment", "half = arb(1) / (2 * pieces)", "half = arb(1) / (4 * pieces)", suprema),
    (
        "segment",
        "c0 = (centre * k_slope - square * q_here - w(xi)) / p",
        "c0 = (centre * k_slope - square * q_here) / p",
        suprema,
    ),
    ("segment", "rate = ((-fast.real).upper() + upper(fast_bend)).upper()", "rate = (-fast.real).upper()", suprema),
    ("segment", "rates.append(rate)", "rates.append(rate.mid())", suprema),
    ("segment", "c.append(upper(potential(xi)))", "c.append(lower(potential(xi)))", suprema),
    # Residuals.
    ("series", "rho = rho + ring.norm(total + row[0] * a[-1])", "pass", series),
    ("series", "rho = rho + ring.norm(total + row[1] * a[-1])", "pass", series),
    ("series", "rho = (rho + _residual(ring, a, k, row, rows)).upper()\n    errors", "errors", series),
    ("series", "rho = (rho + _residual(ring, a, k, row, rows)).upper()\n    alpha", "alpha", series),
    ("series", "last = len(a) + len(row) - 4", "last = len(a) + len(row) - 5", residuals),
    ("series", "total = ring.widen(total, beyond)", "pass", leading),
    ("series", "value_error + value_rest + value_radius", "value_error", series),
    ("series", "(state.value_error, state.slope_error), rho, pieces", "(arb(0), arb(0)), rho, pieces", series),
    # The equation itself: one coefficient nudged, one term missed, one factor not applied.
    (
        "series",
        "constant = constant - ring.lift(segment.w[s - 2])",
        "constant = constant - ring.lift(segment.w[s - 2] * acb('1.000001'))",
        value,
    ),
    ("series", "linear + 2 * drift", "linear + 2 * drift * acb('1.000001')", value),
    ("series", "a = [ring.multiply(factor, earlier) for earlier in a]", "pass", leading),
    # Vertices and the two halves of the match.
    (
        "mismatch",
        "segment = Segment.at_ordinary_point(side_, here, h)",
        "segment = Segment.at_ordinary_point(side_, here + h * 2**-50, h)",
        value,
    ),
    ("mismatch", "here, state = there, settle", "here, state = there + h * 2**-60, settle", value),
    ("mismatch", "    check_homotopy(problem.equation(bits), points[0], points[1], ring.disc)\n", "", foreign_run),
    ("path", "if winding(polygon, root) != 0:", "if False:", paths),
    ("path", "    _check_slit(infinity, disc)\n", "", paths),
    ("path", "if not (end.is_exact() and (end - exact_point(MATCH_POINT)).is_zero()):", "if False:", paths),
    # Structure.
    ("problem", "if equation.degenerate != bool(slope.contains(0)):", "if False:", structure),
    ("problem", "and at_horizon.contains(0)):", "):", structure),
    ("problem", "if not equation.degenerate and not bool(slope < 0):", "if False:", structure),
    (
        "segment",
        "if len(segment.P) <= order_of_zero or any(not x.is_zero() for x in segment.P[:order_of_zero]):",
        "if False:",
        structure,
    ),
    # Models.
    ("taylor", "return self.widen(product, excess) if bool(excess > 0) else product", "return product", models),
    ("taylor", "return self.widen(acb_poly(quotient), remainder)", "return acb_poly(quotient)", models),
    ("taylor", "/ distance).upper()", "/ lower(acb(here)) / 2).upper()", models),
    ("taylor", "if not bool(distance > 0):", "if False:", models),
    ("taylor", "if not bound.is_finite():\n            raise", "if False:\n            raise", models),
    ("taylor", "if not (sigma.is_exact() and sigma.is_finite()):", "if False:", models),
    ("taylor", "return middle, self.norm(a - middle)", "return middle, ZERO", models),
    ("taylor", "side = arb(0, radius)", "side = arb(0, radius / 2)", models),
    # One zero.
    ("one_zero", "rest = sizes[0] + found.error + sum(", "rest = sizes[0] + sum(", two_zeros),
    ("one_zero", "rest = sizes[0] + found.error + sum(", "rest = found.error + sum(", two_zeros),
    (
        "one_zero",
        "sum((sizes[i] * r**i for i in range(2, len(sizes))), arb(0))\n    return",
        "arb(0)\n    return",
        two_zeros,
    ),
    ("one_zero", "- rest - found.error / (1 - r_s)).lower()", "- found.error / (1 - r_s)).lower()", slopes),
    ("one_zero", "epsilon = (size / first.slope).upper()", "epsilon = (size / first.slope / 100).upper()", zeros),
    ("one_zero", "if not bool((upper(offset) + epsilon).upper() < first.r_s):", "if False:", zeros),
    ("one_zero", "if not bool(model.overlaps(value)):", "if False:", zeros),
    ("one_zero", "if not 0 < r < 1:", "if False:", zeros),
    ("statement", "if bool((real - radius).lower() > 0):", "if True:", sides_of_the_axis),
    ("statement", "if statement.kind == CONTINUED:", "if False:", sides_of_the_axis),
    ("statement", "if statement.kind == CLEARING:", "if False:", sides_of_the_axis),
    # Output.
    (
        "printed",
        "if up else scaled.numerator // scaled.denominator",
        "if False else scaled.numerator // scaled.denominator",
        printing,
    ),
    (
        "printed",
        "_scientific(to_fraction(bound.upper()), digits, True)",
        "_scientific(to_fraction(bound.mid()), digits, True)",
        printing,
    ),
    ("statement", "proven = (printed - centre).abs_upper() + radius", "proven = radius", printing),
    # Counting.
    ("count", "return tuple(range(1, last + 1))", "return ()", counting),
    ("count", "return tuple(range(1, last + 1))", "return tuple(range(2, last + 1))", counting),
    ("count", "if not all(bool(upper(end) < 1) for end in ends):", "if False:", counting),
    (
        "count",
        "if not closed or not set(corners) <= set(points) or not _on_outline(points, corners):",
        "if False:",
        counting,
    ),
    ("count", "if not bool(q[0].abs_lower() > arb(1.5) * rest):", "if False:", a_zero_on_an_edge),
    ("certificate", "if len(found) != count.number:", "if False:", completeness),
    ("certificate", "if any(not apart(one, other) for other in found[:i]):", "if False:", completeness),
    ("certificate", "if not _inside(count.region, one):", "if False:", completeness),
    # Records, the clearing, growing modes.
    ("record", "if not (same and small and wide):", "if False:", records),
    ("record", 'if complex(*document["match_point"]) != MATCH_POINT:', "if False:", records),
    (
        "clearing",
        "weight = weight * slope * (m * (m - j))",
        "weight = weight * slope * (m * (m - j + 1))",
        special_zeros,
    ),
    (
        "clearing",
        "total - sigma * sigma * coefficient(Q, s - 2)",
        "total - sigma * coefficient(Q, s - 2)",
        special_zeros,
    ),
    (
        "growing",
        "if depth == _DEEPEST or bool(value < 0):\n        return False",
        "if depth == 3:\n        return True",
        stability,
    ),
]
QUICK = {transport, regular, irregular, weak_bounds, models, printing, two_zeros}


@pytest.mark.parametrize("probe", PROBES, ids=lambda probe: probe.__name__)
def test_probes_pass_on_the_package_as_it_is(probe):
    probe()


@pytest.mark.parametrize(
    ("module", "old", "new", "probe"),
    [
        pytest.param(*entry, id=f"{i}-{entry[0]}-{entry[3].__name__}", marks=[] if i % 9 == 0 else pytest.mark.slow)
        for i, entry in enumerate(SABOTAGES)
    ],
)
def test_a_sabotage_is_noticed(module, old, new, probe):
    with edited(module, old, new):
        noticed = ""
        try:
            probe()
        except AssertionError:
            noticed = "the probe failed"
        except load("refusal").Refusal as reason:
            noticed = f"refused: {reason}"
    assert noticed, f"{module}: {old!r} -> {new!r} went unnoticed"


def test_a_wrong_coefficient_only_widens_the_ball():
    # The residual is that of the polynomial actually used: nudging it by 1e-6 is paid for in the radius.
    old = "a.append(ring.middle(total * (lead / ((k + 1) * (k + 2)))))"
    with edited("series", old, old[:-1].replace("ring.middle(", "ring.middle((1 + acb(2) ** -20) * ") + ")"):
        series()
