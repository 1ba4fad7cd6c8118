"""Third-order products of an amplifier behind the feed, for judging what selectivity buys.

Depends on: nothing of the project.
"""

from __future__ import annotations


def third_order_input_dbm(tone_dbm: float, iip3_dbm: float) -> float:
    """Third-order product of two equal tones, referred to the input: 3 Pin - 2 IIP3, dBm. Pozar 10.3.

    Valid well under compression (tones 10 dB or more under the intercept point)."""
    return 3 * tone_dbm - 2 * iip3_dbm


def third_order_output_dbm(tone_dbm: float, oip3_dbm: float) -> float:
    """The same at the output: 3 Pout - 2 OIP3, dBm."""
    return 3 * tone_dbm - 2 * oip3_dbm


def third_order_below_tones_db(tone_dbm: float, iip3_dbm: float) -> float:
    """How far the product lies under each tone: 2 (IIP3 - Pin), dB."""
    return 2 * (iip3_dbm - tone_dbm)


def triple_beat_input_dbm(tone_dbm: float, iip3_dbm: float) -> float:
    """Product f1 + f2 - f3 of three equal tones: 6 dB above the two-tone product, dBm. Hausman."""
    return third_order_input_dbm(tone_dbm, iip3_dbm) + 6


def third_order_frequencies_mhz(first_mhz: float, second_mhz: float) -> tuple[float, float]:
    """Where the close products fall: 2 f1 - f2 and 2 f2 - f1, MHz."""
    return 2 * first_mhz - second_mhz, 2 * second_mhz - first_mhz
