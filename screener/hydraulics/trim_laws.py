"""How far a cut changes an impeller by its trim law, and how far the law may be off."""

from __future__ import annotations

import numpy as np

from screener.model.arrays import Floats, Real

FITTED = 2.33
"""Head goes with diameter to this power in the one published example; see `trim_head_uncertainty`."""


def trim_length(*, diameter: Real, inlet: Real) -> Floats:
    """Length x = sqrt(D^2 - D1^2) [m] that trim laws raise to their exponents, Q ~ x^a and H ~ x^b.

    diameter : D [m] of the impeller, NaN where not stated
    inlet    : D1 [m] of the impeller's inlet where the law uses it, below D; else 0, and x is D itself
    Any shapes that broadcast.
    Source: ISO 9906:2012, trim rule (from memory): R = x(reduced) / x(tested), Q ~ R, H ~ R^2.

    >>> ratio = trim_length(diameter=np.array(0.285), inlet=0.15) / trim_length(diameter=0.3, inlet=0.15)
    >>> float(ratio.round(5)), float((ratio**2).round(5))
    (0.93274, 0.87)
    """
    return np.asarray(np.sqrt(np.square(diameter) - np.square(inlet)))


def trim_head_uncertainty(*, ratio: Floats, law_head: Floats) -> Floats:
    """Share of its head by which a trimmed impeller may lie below its trim law [-], 0 or more.

    ratio    : (c,) diameter over the tested one, alone in carrying the curve
    law_head : (c,) head by the law over head as tested; ratio^2 by the affinity law
    Returns (c,) 1 - ratio^2.33 / law_head: 1 - ratio^0.33 for the affinity law, that is 1.7 % at a cut of
    5 % and 3.4 % at 10 %; 0 where the law already gives no more than that power of the diameter.
    Source: fitted here to one published example: Lobanoff and Ross, Centrifugal Pumps, 2nd ed., p. 19, in
    which 7 in has to become 5.88 in, and not 5.72, to bring 135 ft to 90 ft.
    """
    return np.maximum(1 - ratio**FITTED / law_head, 0.0)
