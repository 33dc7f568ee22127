"""A second opinion: one operating point at a time, in scalars, sharing no code with the package.

Everything here favours clarity over speed: exact forward equations of IAPWS-IF97, bracketed roots by
Brent's method, one plain loop from the hottest shell to the coldest.  Its only purpose is to disagree.
"""

from .design import Design, OptionDesign, design, ideal_gain_share
from .hour import Point, off, point, points

__all__ = ["Design", "OptionDesign", "Point", "design", "ideal_gain_share", "off", "point", "points"]
