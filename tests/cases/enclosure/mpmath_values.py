"""Writes mpmath.tsv: reference values of the language's functions.

Run as `python3 mpmath_values.py > mpmath.tsv` with mpmath 1.3.0. Each line
holds a function, its arguments (each the f64 nearest to the decimal) and the
value to 40 significant digits. Every value is computed twice, with 120 and
with 200 digits, and must agree; so 40 digits are right even where digits are
lost by cancellation.
"""

import mpmath as mp

PI = 3.141592653589793
TINY, LEAST = 2.2250738585072014e-308, 5e-324

ANY = [0.0, 1.0, -1.0, 0.5, -0.5, 2.0, -2.0, 0.1, -0.1, 3.7, -3.7, 10.0, -10.0,
       1e-5, -1e-5, 1e-20, -1e-20, TINY, -TINY, LEAST, 0.9999999999999999]
WIDE = ANY + [100.0, -100.0, 700.0, -700.0]
ANGLES = ANY + [PI, -PI, PI / 2, -PI / 2, PI / 4, 3 * PI / 4, 2 * PI, 22.0, 355.0, 1e5,
                1e22, 1e300, 1.7976931348623157e308, 6381956970095103.0 * 2.0**797,
                11.0, 52174.0, 1.5707963267948968]
POSITIVE = [1.0, 0.5, 2.0, 0.1, 3.7, 10.0, 1e-5, 1e-20, TINY, LEAST, 1e5, 1e300,
            1.7976931348623157e308, 0.9999999999999999, 1.0000000000000002, 4.0, 1024.0]
UNIT = [x for x in ANY if abs(x) <= 1] + [0.9999, -0.9999, 0.7, -0.7, 0.999999999999]
FROM_ONE = [1.0, 1.0000000000000002, 1.5, 2.0, 10.0, 1e5, 1e300]
GAMMA = [1.0, 2.0, 3.0, 0.5, 1.5, 1.4616321449683622, 1.4616321449683625, 10.0, 10.5,
         23.0, 100.0, 170.5, 0.1, 1e-5, 1e-20, 1e-300, -0.5, -1.5, -2.5, -0.0001, -10.3,
         -0.5040830082644554, -1.5734984731623904, -20.0001]
LARGE = [171.0, 1000.0, 1e5, 1e10, 1e20, 1e100]
ERROR = ANY + [5.0, 6.0, 20.0, 26.0, -5.0, -6.0, 0.4769362762044699]

ONE_ARGUMENT = {
    "exp": (mp.exp, WIDE + [-745.0, 709.0, -1e5, 1e5]),
    "log": (mp.log, POSITIVE),
    "log2": (lambda x: mp.log(x, 2), POSITIVE),
    "sqrt": (mp.sqrt, [0.0] + POSITIVE + [2.25, 1e-300]),
    "sin": (mp.sin, ANGLES),
    "cos": (mp.cos, ANGLES),
    "tan": (mp.tan, ANGLES),
    "asin": (mp.asin, UNIT),
    "acos": (mp.acos, UNIT),
    "atan": (mp.atan, WIDE + [1e10, -1e300]),
    "sinh": (mp.sinh, WIDE),
    "cosh": (mp.cosh, WIDE),
    "tanh": (mp.tanh, WIDE + [20.0, -20.0]),
    "asinh": (mp.asinh, WIDE + [1e10, -1e300]),
    "acosh": (mp.acosh, FROM_ONE),
    "atanh": (mp.atanh, [x for x in UNIT if abs(x) < 1]),
    "gamma": (mp.gamma, GAMMA),
    "lgamma": (lambda x: mp.re(mp.loggamma(x)), GAMMA + LARGE),
    "digamma": (mp.digamma, GAMMA + LARGE),
    "erf": (mp.erf, ERROR),
    "erfc": (mp.erfc, ERROR + [100.0, 1000.0]),
    "factorial": (mp.factorial, [0.0, 1.0, 2.0, 5.0, 20.0, 22.0, 23.0, 30.0, 100.0, 170.0]),
}

POWERS = [(2.0, 0.5), (2.0, 0.1), (0.5, 0.5), (10.0, -0.3), (1e-300, 0.7), (1e300, -0.7),
          (0.1, 10.5), (1.0000000000000002, 1e15), (0.9999999999999999, 1e15), (3.0, 40.0),
          (2.0, 10.0), (-2.0, 3.0), (-2.0, 4.0), (-0.1, 7.0), (0.1, 5.0), (7.0, -3.0),
          (-7.0, -4.0), (0.0, 3.0), (0.0, 0.5), (1.5, 2.0), (1e10, 30.0), (1.1, 3.0), (-1.1, 5.0)]
BINOMIALS = [(0, 0), (5, 0), (5, 2), (5, 5), (5, 6), (10, 5), (60, 30), (100, 50), (130, 60),
             (1000, 3), (1000, 500), (100000, 50000), (1000000, 2)]
DEGREES = [0, 1, 2, 3, 5, 8, 17, 100, 1001]
POINTS = [0.0, 1.0, -1.0, 0.5, -0.5, 0.3, -0.9, 0.9999999999999999, 1.0000000000000002,
          0.7071067811865476, 1.5, -1.5, 1e-10]


def binomial(n, k):
    n, k = int(n), int(k)
    value = 1
    for i in range(k):
        value = value * (n - i) // (i + 1)
    return mp.mpf(value)


def chebyshev(n, x):
    if abs(x) <= 1:
        return mp.cos(n * mp.acos(x))
    value = mp.cosh(n * mp.acosh(abs(x)))
    return -value if x < 0 and n % 2 == 1 else value


def value(f, arguments):
    exact = [mp.mpf(a) for a in arguments]
    with mp.workdps(120):
        first = f(*exact)
    with mp.workdps(200):
        second = f(*exact)
        # At 0 the cosine formula leaves rounding noise instead of a zero.
        if abs(second) < mp.mpf(10) ** -100 and f is chebyshev:
            first = second = mp.mpf(0)
        assert first == second or abs(first - second) < abs(second) * mp.mpf(10) ** -50, (f, arguments)
        return mp.nstr(second, 40)


def write(name, f, arguments):
    texts = [repr(float(a)) for a in arguments]
    print("\t".join([name] + texts + [value(f, arguments)]))


def main():
    print("# Written by mpmath_values.py with mpmath " + mp.__version__)
    for name, (f, points) in ONE_ARGUMENT.items():
        for x in dict.fromkeys(points):
            write(name, f, [x])
    for base, exponent in POWERS:
        write("power", mp.power, [base, exponent])
    for n, k in BINOMIALS:
        write("binomial", binomial, [n, k])
    for n in DEGREES:
        for x in POINTS:
            write("chebyshev", chebyshev, [n, x])


main()
