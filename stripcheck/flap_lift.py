"""What a flap adds to greatest lift and to drag, estimated from its kind, deflection, chord and span.

All functions take and give SI, floats or arrays that broadcast together, and raise nothing. Chord is that of the flap
over that of the wing; span is the length of both flaps together over the span of the wing, and stands for the flapped
share of the wing area: flaps sit inboard, where a wing is as broad as on average or broader.

References
----------
[1] D. P. Raymer, Aircraft Design: A Conceptual Approach, maximum lift with high-lift devices: increments of the section
    at the landing deflection, plain and split 0.9, slotted 1.3, Fowler 1.3 times the extended chord; of the wing 0.9
    times that times the flapped share of the area (from memory).
[2] H. Glauert, thin-aerofoil theory of an aerofoil with a hinged flap.
[3] A. D. Young, Aeronautical Research Council R&M 2622, in the form of B. W. McCormick, Aerodynamics, Aeronautics and
    Flight Mechanics: drag added by plain, split and slotted flaps (from memory).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from stripcheck.numeric import Number

WING_SHARE = 0.9  # of the section's increment that a wing keeps over the flapped area [1]
FULL_CHORD = 0.30  # flap chord from which the whole increment is credited; common practice, no source


class FlapKind(NamedTuple):
    """Figures of a kind of flap: lift of the section [-] at its landing deflection [rad] [1], factor of drag [-] [3].

    The landing deflections are those at which such flaps are near their greatest lift in wind tunnels (from memory).
    """

    lift: float
    landing_deflection: float
    drag: float


# Young gives no Fowler flap; it is slotted when out
FLAP_KINDS = {
    "plain": FlapKind(0.9, np.radians(60.0), 1.7),
    "split": FlapKind(0.9, np.radians(60.0), 1.7),
    "slotted": FlapKind(1.3, np.radians(40.0), 0.9),
    "Fowler": FlapKind(1.3, np.radians(40.0), 0.9),
}


def flap_effectiveness(chord: Number) -> Number:
    """Lift of a deflected flap over that of the whole aerofoil turned by the same small angle [-].

    ``chord`` [-]: of the flap over that of the wing, 0 to 1. Source: [2].

    >>> float(round(flap_effectiveness(0.25), 4))
    0.609
    """
    hinge = np.arccos(2.0 * chord - 1.0)
    return 1.0 - (hinge - np.sin(hinge)) / np.pi


def greatest_lift_increment(lift: Number, landing_deflection: Number, chord: Number, span: Number, extended_chord: Number,
                            deflection: Number) -> Number:  # fmt: skip
    """Rise of the wing's greatest lift coefficient [-] with the flap at a deflection [rad].

    ``lift`` [-] and ``landing_deflection`` [rad] of the kind of flap; ``chord`` and ``span`` [-];
    ``extended_chord`` [-]: wing chord with the flap right out over that with the flap in. Source: [1] at the landing
    deflection and a chord of 0.3; below both it is scaled as thin-aerofoil theory has it, in proportion to deflection
    and to the flap's effectiveness [2], and the chord runs out with the deflection. Above either nothing is added,
    so that it never falls with any argument.

    >>> float(round(greatest_lift_increment(1.3, np.radians(40.0), 0.30, 0.5, 1.0, np.radians(40.0)), 4))
    0.585
    >>> float(round(greatest_lift_increment(1.3, np.radians(40.0), 0.30, 0.5, 1.2, np.radians(20.0)), 3))
    0.322
    """
    reached = np.minimum(deflection / landing_deflection, 1.0)
    effect = np.minimum(flap_effectiveness(chord) / flap_effectiveness(FULL_CHORD), 1.0)
    chord_growth = 1.0 + (extended_chord - 1.0) * reached
    return WING_SHARE * span * lift * chord_growth * effect * reached


def drag_increment(factor: Number, chord: Number, span: Number, deflection: Number) -> Number:
    """Parasite drag coefficient added by a flap [-] at a deflection [rad].

    ``factor`` [-] of the kind of flap; ``chord`` and ``span`` [-]. Source: [3]. What a flap over part of the span adds
    to the induced drag is not in it.

    >>> float(round(drag_increment(1.7, 0.25, 0.6, np.radians(30.0)), 4))
    0.0376
    """
    return factor * chord**1.38 * span * np.square(np.sin(deflection))
