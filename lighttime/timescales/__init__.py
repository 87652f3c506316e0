"""Instants and the time scales they are told in."""

from __future__ import annotations

from lighttime.timescales.epoch import Epoch
from lighttime.timescales.scales import SCALES

__all__ = ["SCALES", "Epoch"]
