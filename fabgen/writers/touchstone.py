"""The expected reflection as a Touchstone file (version 1, one port), for overlay on an analyser.

Depends on: sizing.records.
"""

from __future__ import annotations

import itertools

from fabgen import __version__
from fabgen.errors import NumericalError
from fabgen.sizing.records import Feed

REFERENCE_OHM = 50


def touchstone_text(feed: Feed) -> str:
    """Reflection in the coax after the series capacitor, real and imaginary, referred to 50 ohm, in rising MHz.

    ASCII only, as the format asks. NumericalError when the sweep is not rising.
    """
    response = feed.predicted.response
    frequencies = response.frequency_mhz
    if any(b <= a for a, b in itertools.pairwise(frequencies)):
        raise NumericalError("the response's frequencies do not rise; the sweep cannot be written as Touchstone")
    lines = [
        f"! Expected reflection of the feed at {feed.job.target.frequency_mhz:g} MHz, computed by fabgen {__version__}",
        "! Reference plane: the coax at the tap; the cable's length turns the phase, not the return loss",
        f"# MHZ S RI R {REFERENCE_OHM}",
    ]
    lines += [
        f"{mhz:.6f} {reflection.real:.6f} {reflection.imag:.6f}"
        for mhz, reflection in zip(frequencies, response.reflection, strict=True)
    ]
    return "\n".join(lines).replace("-0.000000", "0.000000") + "\n"
