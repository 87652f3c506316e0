"""Where the bodies of the solar system are."""

from lighttime.ephemeris.bodies import Ephemeris

__all__ = ["Ephemeris"]
