"""One direction, from one north to another."""

from .convert import Bearing, convert_bearing

__all__ = ["Bearing", "convert_bearing"]
