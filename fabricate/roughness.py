"""Roughness of a turned surface: the cusps that a round nose leaves between one revolution and the next.

*Rt* is the height of a cusp over its valley, *Ra* the mean distance from the mean line.
"""

from __future__ import annotations

from math import sqrt

RA_OVER_RT = 4.0 / (9.0 * sqrt(3.0))
"""Ra of a parabolic cusp over its Rt [-], 0.2566; many tables round it to 1/4."""


def feed_for_rt(height: float, nose_radius: float) -> float:
    """Return the feed whose cusps have a given height, ``2 sqrt(2 r Rt − Rt²)``.

    Parameters
    ----------
    height : float
        Rt [mm], less than the nose radius.
    nose_radius : float
        Of the insert [mm].

    Returns
    -------
    float
        Feed per revolution [mm].

    Notes
    -----
    The exact form of ``Rt = f²/(8 r)``: of cusps between circles, so the feed is a hair smaller.

    Examples
    --------
    A feed of 0.2 and a nose of 0.8 leave 6.27 µm:

    >>> round(feed_for_rt(6.274606681e-3, 0.8), 9)
    0.2
    """
    return 2.0 * sqrt(2.0 * nose_radius * height - height**2)


def rt_for_feed(feed: float, nose_radius: float) -> float:
    """Return the height of the cusps that a feed leaves, ``r − sqrt(r² − f²/4)``.

    Parameters
    ----------
    feed : float
        Per revolution [mm], less than twice the nose radius.
    nose_radius : float
        Of the insert [mm].

    Returns
    -------
    float
        Rt [mm].

    Examples
    --------
    >>> round(1e3 * rt_for_feed(0.2, 0.8), 6)
    6.274607
    """
    half = 0.5 * feed
    return half**2 / (nose_radius + sqrt(nose_radius**2 - half**2))


def rt_for_ra(mean: float) -> float:
    """Return the cusp height of a surface with a given Ra [mm].

    Parameters
    ----------
    mean : float
        Ra [mm].

    Returns
    -------
    float
        Rt [mm].

    Examples
    --------
    >>> round(1e3 * rt_for_ra(1.603750748e-3), 6)
    6.25
    """
    return mean / RA_OVER_RT
