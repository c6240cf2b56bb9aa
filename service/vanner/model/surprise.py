"""How surprising a number of mentions is, were nothing new.

The gamma-Poisson predictive: a Poisson rate with a gamma posterior, looked at through N
further items, is negative binomial (Gelman and others, Bayesian Data Analysis, 3rd edition,
section 2.6). With shape s and mean e,

    P(X >= n) = I_{e / (e + s)}(n, s)

where I is the regularised incomplete beta function. The Poisson tail was not taken: it holds
the rate for known, and at mean 0.5 reaches one in a million at 8 items where the predictive
of shape 0.5 needs 18.
"""

from __future__ import annotations

import numpy as np
from scipy import special

from vanner.model.decay import Floats

# Below this a tail is no longer a float64; its bits are what the bound gives.
_SMALLEST_TAIL = 1e-300


def surprise_bits(seen: Floats, expected: Floats, shape: Floats) -> Floats:
    """-log2 P(X >= seen) under the gamma-Poisson predictive.

    Args:
        seen: (n,) float64, items with a mention; zero has no surprise.
        expected: (n,) float64, the predictive's mean, above zero.
        shape: (n,) float64, the predictive's shape, above zero.

    Returns:
        (n,) float64 bits, at most about 997.
    """
    tail = special.betainc(np.maximum(seen, 1.0), shape, expected / (expected + shape))
    bits: Floats = -np.log2(np.maximum(tail, _SMALLEST_TAIL))
    return np.where(seen > 0, np.maximum(bits, 0.0), 0.0)


def season_rate(
    rate: Floats, season_mentions: Floats, season_items: Floats | float, strength: float
) -> Floats:
    """A term's rate in one season (hour band or weekday), shrunk to its overall rate.

    A gamma prior of mean `rate` and shape `strength` mentions gives
    (h_season + strength) / (M_season + strength / rate).

    Args:
        rate: (n,) float64, overall mentions an item, above zero.
        season_mentions: (n,) float64, decayed mentions in the season.
        season_items: decayed items in the season.
        strength: Mentions' worth of belief in the overall rate, above zero.

    Returns:
        (n,) float64. Where the season has no items, it is the overall rate.
    """
    result: Floats = (season_mentions + strength) / (season_items + strength / rate)
    return result
