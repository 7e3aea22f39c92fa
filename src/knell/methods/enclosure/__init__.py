"""Proven spectra: enclosures of modes and complete lists of a window, in ball arithmetic.

`one_zero.enclose_zero` proves that a disc holds exactly one zero of the quasinormal condition and shrinks it;
`certificate.certify_window` counts all zeros of a window rigorously and encloses each, so that the list is complete.
The derivations stand in the modules: `lemmas` (tails and transport), `series` (residuals), `path`
(homotopy), `taylor` (models in σ), `one_zero` (Rouché), `count` (winding), `clearing` (zeros on the axis), `growing`
(no growing mode). No float decides anything but paths, orders and precision.
"""
