"""One zero of ``D``: a disc that holds exactly one, and inside it a disc as small as the digits asked.

**A, uniqueness.** A Taylor model ``D(τ) = P(τ) + E(τ)``, ``|E| <= η`` on ``|τ| <= 1``, ``τ = (σ - σ₀)/R``, ``P =
Σc_iτ^i`` one fixed polynomial; ``D`` and so ``E`` are analytic. If for some ``r < 1``

    |c₁| r > |c₀| + η + Σ_{i>=2} |c_i| r^i,

``D`` has by Rouché's theorem exactly one zero in ``|τ| < r``, a simple one. With ``r_s = r/4``

    μ = |c₁| - Σ_{i>=2} i |c_i| r_s^{i-1} - η/(1 - r_s) > 0

bounds the difference quotients of ``D`` on ``|τ| <= r_s`` from below (``|E'| <= η/(1-r_s)`` there by Cauchy).

**B, digits.** One ball ``D(σ_B)``, ``σ_B`` inside, along its own path and with its own orders, but with the same
``u_m``, the same side of each root and the same normalisation, so that it is a value of the same function. On ``|σ -
σ_B| <= ε`` with ``ε = |D(σ_B)| R/μ``, if this disc lies in ``|τ| <= r_s``: ``D`` is injective there and ``|D(σ) -
D(σ_B)| >= μ|σ - σ_B|/R``, so on a circle of radius a little more than ``ε``, ``D - D(σ_B)`` outweighs ``D(σ_B)`` and
Rouché puts the zero inside it.

The statement is *exactly one zero of D in the disc of uniqueness, and it lies within ε of σ_B*. It is a mode when in
addition ``Re ω > 0`` on all of the small disc (``Re ω < 0``: a zero of the continued sheet).
"""

from __future__ import annotations

from dataclasses import dataclass

from flint import acb, arb, ctx

from knell.methods.enclosure.effort import Effort, Run, cleared_factors, prepare
from knell.methods.enclosure.mismatch import Mismatch
from knell.methods.enclosure.path import Stride
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import InexactVertex, LostPrecision, NotAMode, Refusal, WeakBound
from knell.methods.enclosure.taylor import exact_point, upper

# Radius of the model in σ, and the effort, tried in this order.
TRIES = (
    (0.08, Effort(11, 12, Stride(0.45, 3.5))),
    (0.04, Effort(13, 12, Stride(0.45, 3.5))),
    (0.02, Effort(16, 12, Stride(0.45, 3.5))),
    (0.02, Effort(22, 18, Stride(0.4, 3.5))),
    (0.008, Effort(26, 18, Stride(0.4, 3.5))),
    (0.003, Effort(32, 20, Stride(0.4, 3.5))),
    (0.001, Effort(40, 20, Stride(0.4, 3.5))),
)
# The secant method doubles the digits in fewer than two rounds: 200 digits take eight.
_ROUNDS = 20
# Factors 1 - 2σ/(p₁j) that vanish within this many radii of the centre are cleared.
REACH = 6.0


@dataclass(frozen=True)
class Uniqueness:
    """Step A: exactly one zero in ``|σ - centre| < r``; ``slope`` bounds the difference quotients on ``r_s``."""

    centre: acb
    r: arb
    r_s: arb
    slope: arb
    run: Run
    mismatch: Mismatch


@dataclass(frozen=True)
class Zero:
    """Steps A and B: the only zero of ``D`` in the disc of uniqueness lies within ``radius`` of ``sigma``."""

    problem: Problem
    uniqueness: Uniqueness
    sigma: acb
    radius: arb
    run: Run

    @property
    def cleared(self) -> tuple[int, ...]:
        return self.uniqueness.run.cleared


def uniqueness(problem: Problem, run: Run, share: float | None = None) -> Uniqueness:
    """Step A from one model. ``share`` is ``r/R``, an exact double below 1; by default the largest that works.

    Raises `NotAMode` when no radius passes Rouché's test: no zero, or more than one, near the centre.
    """
    found, run = run.evaluate(problem)
    with ctx.workprec(run.bits):
        sizes = [upper(c) for c in found.value.coeffs()]
        for r in (share,) if share is not None else (0.875, 0.75, 0.5, 0.375, 0.25, 0.125, 0.0625):
            if not 0 < r < 1:
                raise WeakBound("r must lie between 0 and R")
            if _rouche(found, sizes, arb(r)):
                break
        else:
            raise NotAMode("no disc about the centre passes Rouché's test: no simple zero is near enough")
        R, r_s = arb(run.radius), arb(r) / 4
        rest = sum((i * sizes[i] * r_s ** (i - 1) for i in range(2, len(sizes))), arb(0))
        mu = (found.value[1].abs_lower() - rest - found.error / (1 - r_s)).lower()
        if not bool(mu > 0):
            raise WeakBound("μ is not positive: a smaller disc or more digits are needed")
        return Uniqueness(run.sigma, (R * r).mid(), (R * r_s).mid(), (mu / R).lower(), run, found)


def _rouche(found: Mismatch, sizes: list[arb], r: arb) -> bool:
    if len(sizes) < 2:
        return False
    rest = sizes[0] + found.error + sum((sizes[i] * r**i for i in range(2, len(sizes))), arb(0))
    return bool((found.value[1].abs_lower() * r).lower() > rest.upper())


def shrink(problem: Problem, first: Uniqueness, run: Run) -> tuple[Zero, Mismatch]:
    """Step B at ``run.sigma``: the zero, and the value ``D(σ_B)`` behind it.

    Raises `LostPrecision` when ``D(σ_B)`` is not zero within what the disc of uniqueness allows.
    """
    if run.cleared != first.run.cleared or run.radius:
        raise InexactVertex("steps A and B must use one normalisation, and B a single value")
    found, run = run.evaluate(problem)
    with ctx.workprec(max(run.bits, first.run.bits)):
        value = found.value + acb(arb(0, found.error), arb(0, found.error))
        # D(σ_B) is the midpoint, exact, within found.error: this is the sharp bound of |D(σ_B)|.
        size = (upper(found.value) + found.error).upper()
        epsilon = (size / first.slope).upper()
        offset = run.sigma - first.centre
        if not bool((upper(offset) + epsilon).upper() < first.r_s):
            raise LostPrecision("|D|/μ does not fit into r_s: the centre is no zero, or more precision is needed")
        if not bool(first.r_s < first.r) or not bool(first.r < arb(first.run.radius)):
            raise WeakBound("r_s < r < R does not hold")
        _consistent(first, offset, value)
        return Zero(problem, first, run.sigma, epsilon, run), found


def _consistent(first: Uniqueness, offset: acb, value: acb) -> None:
    """A and B are values of one function: their enclosures at ``σ_B`` must meet."""
    tau, error = offset / arb(first.run.radius), first.mismatch.error
    model = first.mismatch.value(tau) + acb(arb(0, error), arb(0, error))
    if not (model.is_finite() and value.is_finite()):
        raise LostPrecision("a value of D is not finite: raise the precision")
    if not bool(model.overlaps(value)):
        raise Refusal("steps A and B disagree: this is an error of the program, not of the mode")


def model_root(first: Uniqueness) -> acb:
    """The root of ``P`` in the disc, by Newton's method, as an exact number: a better centre, nothing more."""
    polynomial = first.mismatch.value
    slope, tau = polynomial.derivative(), acb(0)
    with ctx.workprec(first.run.bits):
        for _ in range(8):
            tau = (tau - polynomial(tau) / slope(tau)).mid()
        return (first.centre + tau * arb(first.run.radius)).mid()


def find_uniqueness(problem: Problem, seed: complex) -> Uniqueness:
    """Step A about a seed (``σ`` in doubles), with growing effort; raises the last `Refusal`."""
    sigma, refusal = exact_point(seed), None
    for radius, effort in TRIES:
        R = min(radius, 0.2 * abs(seed))
        try:
            cleared = cleared_factors(problem, seed, R, REACH)
            return uniqueness(problem, prepare(problem, sigma, R, effort, cleared))
        except Refusal as reason:
            refusal = reason
    raise refusal or NotAMode("no effort given")


def value_effort(digits: float) -> Effort:
    """Effort of a single value of ``D`` to about ``digits`` digits."""
    return Effort(digits, 0, Stride(0.4, 10.0))


def enclose_zero(problem: Problem, seed: complex, digits: int = 30) -> Zero:
    """Exactly one zero of ``D`` near ``seed`` (``σ`` in doubles), to a radius below ``10^-digits`` in ``σ``.

    Raises a `Refusal` when it cannot be proven.
    """
    first = find_uniqueness(problem, seed)
    root = model_root(first)
    slope = first.mismatch.value.derivative()(acb(0)) / arb(first.run.radius)
    return refine(problem, first, root, slope, digits)


def refine(problem: Problem, first: Uniqueness, sigma: acb, slope: acb, digits: int) -> Zero:
    """Step B by the secant method on its own values, from ``sigma`` and a first guess of ``dD/dσ``."""
    flatness = max(0.0, -_log10(first.slope))
    goal, last, stuck = min(22.0, digits) + flatness, None, 0
    for _ in range(_ROUNDS):
        if stuck == 4:
            break
        zero, found = shrink(problem, first, prepare(problem, sigma, 0.0, value_effort(goal), first.run.cleared))
        if bool(zero.radius < arb(10) ** -digits):
            return zero
        # What the error of D alone makes of the radius tells how many digits this zero costs.
        lost = goal + _log10(found.error / first.slope)
        if bool(zero.radius < 4 * found.error / first.slope):
            stuck += 1
        with ctx.workprec(zero.run.bits):
            if last is not None and not (sigma - last[0]).contains(0):
                chord = (found.value - last[1]) / (sigma - last[0])
                slope = chord if chord.is_finite() and not chord.contains(0) else slope
        goal = min(digits + lost + 1, 1.8 * -_log10(zero.radius) + lost + 6) + 3 * stuck
        with ctx.workprec(zero.run.bits + int(8 * goal)):
            last, sigma = (sigma, found.value), (sigma - found.value / slope.mid()).mid()
    raise LostPrecision(f"{digits} digits not reached with {zero.run.bits} bits")


def _log10(x: arb) -> float:
    """Decimal logarithm of a positive ball, for planning."""
    with ctx.workprec(53):
        return float(x.mid().log() / arb(10).log()) if bool(x.mid() > 0) else -1e4
