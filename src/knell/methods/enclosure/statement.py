"""What is printed of a proven zero, in decimals that stay true.

``Mω = -iσ M`` where ``M = (1+q)/2`` is itself a ball unless ``q`` is rational. The printed radius is an upper bound
of ``|printed - Mω|`` over everything that is not known exactly: the zero inside its disc, ``M`` in its ball, the
rounding of the printed centre. The printed radius of uniqueness is a lower bound: every ``Mω'`` within it of the
printed centre has its ``σ'`` inside the disc in which ``D`` has exactly one zero."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from flint import acb, arb, ctx

from knell.methods.enclosure.clearing import vanishes_exactly
from knell.methods.enclosure.one_zero import Zero
from knell.methods.enclosure.printed import ball, decimal, rounded_down, rounded_up, to_fraction
from knell.methods.enclosure.refusal import LostPrecision, NotAMode

MODE, CONTINUED, CLEARING = "mode", "continued", "clearing"


@dataclass(frozen=True)
class Statement:
    """Decimals of ``Mω``: exactly one zero within ``unique_radius`` of the centre, and it is within ``proven_radius``.

    ``kind`` is ``mode`` (``Re ω > 0`` on the whole small disc), ``continued`` (``Re ω < 0`` on it) or ``clearing`` (the
    exact zero ``-ijκ_s`` of a cleared factor, neither).
    """

    kind: str
    frequency_re: str
    frequency_im: str
    proven_radius: str
    unique_radius: str

    @property
    def is_mode(self) -> bool:
        return self.kind == MODE


def enclosure(zero: Zero) -> tuple[acb, arb]:
    """A ball of midpoints ``Mω`` and a radius: the zero is within the radius of a number of the ball."""
    with ctx.workprec(zero.run.bits + 30):
        mass = zero.problem.equation(zero.run.bits).mass
        return acb(0, -1) * zero.sigma * mass, (zero.radius * mass.abs_upper()).upper()


def kind_of(zero: Zero) -> str:
    """Which side of the axis, decided on the whole final enclosure.

    Raises `LostPrecision` when the disc meets the axis and holds no zero of the clearing: more digits may decide.
    """
    centre, radius = enclosure(zero)
    with ctx.workprec(zero.run.bits):
        real = centre.real
        if bool((real - radius).lower() > 0):
            return MODE
        if bool((real + radius).upper() < 0):
            return CONTINUED
        slope = -sum((k * c for k, c in enumerate(zero.problem.equation(zero.run.bits).f)), arb(0))
        for j in zero.cleared:
            offset = slope * j / 2 - zero.uniqueness.centre
            if bool(offset.abs_upper() < zero.uniqueness.r) and vanishes_exactly(zero.problem, j):
                return CLEARING
    raise LostPrecision("the sign of Re ω is not decided: the enclosure meets the imaginary axis")


def state(zero: Zero, digits: int) -> Statement:
    """The statement with ``digits`` + 3 decimals of the centre."""
    kind = kind_of(zero)
    centre, radius = enclosure(zero)
    places = digits + 3
    with ctx.workprec(zero.run.bits + 30):
        re, im = (decimal(to_fraction(part.mid()), places) for part in (centre.real, centre.imag))
        printed = printed_centre(re, im)
        mass = zero.problem.equation(zero.run.bits).mass
        proven = (printed - centre).abs_upper() + radius
        sigma = printed * acb(0, 1) / mass
        room = zero.uniqueness.r - (sigma - zero.uniqueness.centre).abs_upper()
        unique = room * mass.abs_lower()
        if not bool(unique.lower() > proven.upper()):
            raise LostPrecision("the disc of uniqueness does not hold the printed disc: print more digits")
        return Statement(kind, re, im, rounded_up(proven), rounded_down(unique))


def state_mode(zero: Zero, digits: int) -> Statement:
    """`state`, for a mode. Raises `NotAMode` when the zero is one of the continued sheet or of the clearing."""
    statement = state(zero, digits)
    if statement.kind == CONTINUED:
        raise NotAMode("the zero has Re ω < 0: it belongs to the continued sheet and is no mode")
    if statement.kind == CLEARING:
        raise NotAMode("the zero is that of a cleared factor, at -ijκ_s exactly: no mode")
    return statement


def printed_centre(re: str, im: str) -> acb:
    """The exact decimals as a ball at the precision of the context."""
    return acb(ball(Fraction(re)), ball(Fraction(im)))
