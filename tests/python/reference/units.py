"""Units as exact rationals.

Sources: SI Brochure, 9th ed. (prefixes, degree, defining constants c and e); UCUM (codes, the
international knot of 1852 m/h, the gauss of 1e-4 T); Jackson, appendix on units (1 statvolt =
c/1e6 V with c in m/s, that is 299.792458 V).
"""

from fractions import Fraction

from mpmath import mp, mpf

C = 299_792_458
ELEMENTARY_CHARGE = Fraction("1.602176634e-19")

PI = "π"  # marks a factor that is a rational times π

TABLE = {
    "e": {
        "V/m": 1, "mV/m": Fraction(1, 1000), "uV/m": Fraction(1, 10**6), "kV/m": 1000,
        "MV/m": 10**6, "V/cm": 100, "statV/cm": Fraction(C, 10**4),
    },
    "b": {
        "T": 1, "mT": Fraction(1, 1000), "uT": Fraction(1, 10**6), "nT": Fraction(1, 10**9),
        "pT": Fraction(1, 10**12), "G": Fraction(1, 10**4),
    },
    "velocity": {"m/s": 1, "km/s": 1000, "[kn_i]": Fraction(1852, 3600)},
    "angle": {"rad": 1, "deg": (Fraction(1, 180), PI)},
    "angular_velocity": {
        "rad/s": 1, "deg/s": (Fraction(1, 180), PI), "circ/s": (2, PI),
        "circ/min": (Fraction(2, 60), PI),
    },
    "energy": {
        "J": 1, "eV": ELEMENTARY_CHARGE, "keV": 10**3 * ELEMENTARY_CHARGE,
        "MeV": 10**6 * ELEMENTARY_CHARGE, "GeV": 10**9 * ELEMENTARY_CHARGE,
    },
    "length": {"m": 1, "km": 1000, "cm": Fraction(1, 100), "mm": Fraction(1, 1000)},
    "time": {"s": 1},
}

SI = {quantity: next(code for code, f in codes.items() if f == 1) for quantity, codes in TABLE.items()}


def factor(quantity, code):
    """The value of one `code` in SI units, as a big float."""
    rational = TABLE[quantity][code]
    with_pi = isinstance(rational, tuple)
    rational = Fraction(rational[0] if with_pi else rational)
    value = mpf(rational.numerator) / rational.denominator
    return value * mp.pi if with_pi else value


class Units:
    """The units of one question: SI where it names none."""

    def __init__(self, stated):
        self.codes = SI | (stated or {})

    def factor(self, quantity):
        return factor(quantity, self.codes[quantity])

    def number(self, quantity, value):
        """A received double in SI units, exactly."""
        return mpf(value) * self.factor(quantity)

    def vector(self, quantity, values):
        return [self.number(quantity, value) for value in values]
