"""Normal gravity at a place: what an accelerometer at rest should read."""

import math


def normal_gravity_mps2(lat_deg, height_m):
    """Somigliana's closed formula on WGS84, to second order in height (NGA.STND.0036, WGS 84, 2014, eq. 4-1, 4-3)."""
    s2 = math.sin(math.radians(lat_deg)) ** 2
    a, b, flattening = 6378137.0, 6356752.314245179, 1 / 298.257223563
    m = 7.292115e-5**2 * a**2 * b / 3.986004418e14
    surface = 9.7803253359 * (1 + 0.00193185265241 * s2) / math.sqrt(1 - 0.00669437999014 * s2)
    return surface * (1 - 2 / a * (1 + flattening + m - 2 * flattening * s2) * height_m + 3 / a**2 * height_m**2)
