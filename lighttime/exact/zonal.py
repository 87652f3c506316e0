"""Zonal tides in UT1 at extended precision, from the published table."""

from __future__ import annotations

from functools import lru_cache

from lighttime.data import table
from lighttime.exact.numbers import Context, Real, decimal

__all__ = ["zonal_tides_ut1"]

_DELAUNAY = (
    ("485868.249036", "1717915923.2178", "31.8792", "0.051635", "-0.00024470"),
    ("1287104.793048", "129596581.0481", "-0.5532", "0.000136", "-0.00001149"),
    ("335779.526232", "1739527262.8478", "-12.7512", "-0.001037", "0.00000417"),
    ("1072260.703692", "1602961601.2090", "-6.3706", "0.006593", "-0.00003169"),
    ("450160.398036", "-6962890.5431", "7.4722", "0.007702", "-0.00005939"),
)
"""l, l', F, D, Omega: arcseconds, by powers of Julian centuries. Source: TN36, equation 5.43."""

Rows = tuple[tuple[Real, ...], ...]


@lru_cache(maxsize=16)
def _polynomials(ctx: Context) -> Rows:
    return tuple(tuple(ctx.mpf(c) for c in series) for series in _DELAUNAY)


@lru_cache(maxsize=16)
def _terms(ctx: Context) -> tuple[Rows, tuple[Real, ...], tuple[Real, ...]]:
    """Multipliers of the five arguments, and amplitudes of sine and cosine (s), of the tides."""
    tides = table("zonal_tides")
    multiples = zip(*(tides[name] for name in ("l", "l_sun", "F", "D", "Omega")), strict=True)
    return (
        tuple(tuple(ctx.mpf(int(m)) for m in five) for five in multiples),
        tuple(decimal(ctx, sine) / 10**4 for sine in tides["ut1_sin"]),
        tuple(decimal(ctx, cosine) / 10**4 for cosine in tides["ut1_cos"]),
    )


def zonal_tides_ut1(tt: Real) -> Real:
    """What the 62 zonal tides add to UT1 at a Julian date of TT, seconds.

    Source: IERS Conventions (2010), TN36, equation 8.1 and table 8.1.
    """
    ctx = tt.context
    t = (tt - 2451545) / 36525
    powers = [t**power for power in range(5)]
    arcsecond = ctx.pi / 648000
    arguments = [arcsecond * ctx.fdot(series, powers) for series in _polynomials(ctx)]
    multiples, in_phase, quadrature = _terms(ctx)
    phases = [ctx.cos_sin(ctx.fdot(five, arguments)) for five in multiples]
    cosines, sines = zip(*phases, strict=True)
    return ctx.fdot(in_phase, sines) + ctx.fdot(quadrature, cosines)
