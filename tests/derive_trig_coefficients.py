"""Derives the polynomial coefficients in c_core/src/trig.c. Run: python tests/derive_trig_coefficients.py

Remez exchange on the reduced ranges, in the square of the argument:
    sin y = y + y^3 p(y^2),  cos y = 1 - y^2/2 + y^4 q(y^2)   for |y| <= pi/4
    atan t = t + t^3 r(t^2)                                    for |t| <= tan(pi/8)
The weight makes the error relative to the function's value. Prints each set with its largest relative error.
"""

import mpmath as mp

mp.mp.dps = 60


def remez(f, weight, low, high, degree, rounds=12):
    """Coefficients of the polynomial of this degree closest to f under the weight on [low, high]."""
    nodes = [(low + high) / 2 + (high - low) / 2 * mp.cos(mp.pi * k / (degree + 1)) for k in range(degree + 2)][::-1]
    for _ in range(rounds):
        matrix = mp.matrix(degree + 2, degree + 2)
        right = mp.matrix(degree + 2, 1)
        for i, x in enumerate(nodes):
            for j in range(degree + 1):
                matrix[i, j] = x ** j
            matrix[i, degree + 1] = (-1) ** i / weight(x)
            right[i] = f(x)
        solution = mp.lu_solve(matrix, right)
        coefficients = [solution[j] for j in range(degree + 1)]

        def error(x, c=tuple(coefficients[::-1])):
            return weight(x) * (f(x) - mp.polyval(c, x))

        grid = [low + (high - low) * k / 600 for k in range(601)]
        values = [error(x) for x in grid]
        peaks, start = [], 0
        for k in range(1, 602):
            if k == 601 or values[k] * values[start] < 0:
                best = max(range(start, k), key=lambda i: abs(values[i]))
                peaks.append(grid[best])
                start = k
        if len(peaks) != degree + 2:
            break
        nodes = peaks
    return coefficients, max(abs(v) for v in values)


def sine_tail(x):
    y = mp.sqrt(x)
    return (mp.sin(y) - y) / y ** 3


def cosine_tail(x):
    y = mp.sqrt(x)
    return (mp.cos(y) - 1 + x / 2) / x ** 2


def arctangent_tail(x):
    t = mp.sqrt(x)
    return (mp.atan(t) - t) / t ** 3


if __name__ == "__main__":
    small = mp.mpf(10) ** -12
    for real, degrees in (("double", (5, 5, 10)), ("float", (2, 2, 4))):
        for name, f, order, top, degree in (("sine", sine_tail, 2, (mp.pi / 4) ** 2, degrees[0]),
                                            ("cosine", cosine_tail, 4, (mp.pi / 4) ** 2, degrees[1]),
                                            ("arctangent", arctangent_tail, 2, mp.tan(mp.pi / 8) ** 2, degrees[2])):
            coefficients, worst = remez(f, lambda x, k=order: x ** (k // 2), small, top, degree)
            print(f"{real} {name}: relative error {mp.nstr(worst, 3)}")
            for c in coefficients:
                print("    ", mp.nstr(c, 19 if real == "double" else 10))
