"""Refusals: every way in which a proof can fail, as exceptions with a reason.

A check that decides a proof raises one of these and is never an ``assert``, which
``python -O`` removes. A refusal says nothing about the physics: it means *not proven
with this effort*, or, for `NotAMode`, that the zero found is no quasinormal mode.
"""

from __future__ import annotations


class Refusal(ArithmeticError):
    """A proof was refused. ``reason`` is a short word for records, the message says more."""

    reason = "refused"


class WeakBound(Refusal):
    """A bound needed by a lemma is not positive: ``d``, ``γ``, ``inf|p|``, ``μ`` or a denominator."""

    reason = "weak bound"


class LostPrecision(Refusal):
    """A ball is too wide, or not finite: more bits, a higher degree or a tighter tolerance are needed."""

    reason = "precision"


class ForeignPath(Refusal):
    """The path could not be shown to be homotopic to the real segment."""

    reason = "path"


class InexactVertex(Refusal):
    """A vertex of the path, a corner of a tile or a centre is not one exact number."""

    reason = "inexact vertex"


class BadStructure(Refusal):
    """The equation lacks a structural zero, or a parameter is out of range."""

    reason = "structure"


class NotAMode(Refusal):
    """No zero is near the centre, or the zero does not lie in ``Re ω > 0``."""

    reason = "no mode"


class NoCount(Refusal):
    """The winding number of a window could not be enclosed."""

    reason = "no count"


class Incomplete(Refusal):
    """The zeros enclosed do not add up to the zeros counted."""

    reason = "incomplete"


class BadRecord(Refusal):
    """A stored proof does not say what it must, or its check gives less than it claims."""

    reason = "record"
