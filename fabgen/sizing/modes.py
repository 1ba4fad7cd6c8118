"""Waveguide modes of the can's bore and which of them the feed can excite.

The feed is its own mirror image in y = 0, with the source across that plane: the plane acts as an electric wall.
It has no mirror plane x = 0, because the gap, the bars and the tap sit on +x.

Depends on: sizing.records, theory.
"""

from __future__ import annotations

from fabgen.sizing.records import Mode
from fabgen.theory.waveguide import cutoff_mhz

_MODES = (
    ("TE11", True, "wanted mode: field along y, driven by loop and bars"),
    ("TM01", False, "its axial field would lie along the mirror plane y = 0, which acts as an electric wall"),
    ("TE21", True, "allowed by the mirror plane; gap and bars on +x break the symmetry about x = 0"),
    ("TE01", True, "allowed by the mirror plane; driven by what current runs round the whole loop"),
)


def bore_modes(bore_mm: float, frequency_mhz: float) -> tuple[Mode, ...]:
    """Cut-offs of a round bore ``bore_mm``, and whether each mode runs at ``frequency_mhz`` and is driven.

    For a prism the bore across flats is used: its cut-offs lie a few per cent lower.
    """
    cutoffs = {name: cutoff_mhz(name, bore_mm) for name, _, _ in _MODES}
    return tuple(Mode(name, cutoffs[name], cutoffs[name] < frequency_mhz, driven, why) for name, driven, why in _MODES)
