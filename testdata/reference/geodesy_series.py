"""Prints the coefficients of pipeline/geodesy/series.go, derived exactly.

    python3 geodesy_series.py

With r = sqrt(1 - 2*eps*cos(2*sigma) + eps**2), Karney (2013) integrates over sigma

    I1: r/(1 - eps)    I2: (1 - eps)/r    I3: 2*(1 - eps)/((1 + n)*(1 - eps) + (1 - n)*r)

(his eqs 7, 41 and 8 with k**2 = 4*eps/(1 - eps)**2 and f = 2*n/(1 + n)). Each is
expanded here in rational arithmetic as a cosine series whose coefficients are
polynomials in eps and n; integrated term by term it is A*(sigma + sum of
C_l*sin(2*l*sigma)). A polynomial is a dict {(power of eps, power of n,
harmonic): coefficient}, the harmonic that of exp(2i*sigma), negative ones included.
"""

from fractions import Fraction as F

ORDER = 6


def product(p, q, order=ORDER):
    out = {}
    for (e, n, h), c in p.items():
        for (e2, n2, h2), d in q.items():
            if e + e2 + n + n2 <= order:
                key = (e + e2, n + n2, h + h2)
                out[key] = out.get(key, F(0)) + c * d
    return {k: c for k, c in out.items() if c}


def total(*terms):
    out = {}
    for scale, p in terms:
        for k, c in p.items():
            out[k] = out.get(k, F(0)) + F(scale) * c
    return {k: c for k, c in out.items() if c}


def compose(power, z, order=ORDER):
    """(1 + z)**power by the binomial series; z has no constant term."""
    out, term, coefficient = {}, {(0, 0, 0): F(1)}, F(1)
    for j in range(order + 1):
        out = total((1, out), (coefficient, term))
        coefficient *= (F(power) - j) / (j + 1)
        term = product(term, z, order)
    return out


ONE = {(0, 0, 0): F(1)}
EPS = {(1, 0, 0): F(1)}
N = {(0, 1, 0): F(1)}
Z = {(1, 0, 1): F(-1), (1, 0, -1): F(-1), (2, 0, 0): F(1)}  # r**2 - 1
R = compose(F(1, 2), Z)
LESS = total((1, ONE), (-1, EPS))  # 1 - eps


def integrated(integrand, name, order):
    """A, and C_l = (2*c_l)/(2*l*A) of the integrand's cosine amplitudes 2*c_l."""
    a = {k: c for k, c in integrand.items() if k[2] == 0}
    inverse = compose(-1, total((1, a), (-1, ONE)), order)
    table(name.replace("C", "A"), a)
    for l in range(1, order + 1):
        amplitude = {(e, n, 0): c / l for (e, n, h), c in integrand.items() if h == l}
        table(f"{name}[{l}]", product(amplitude, inverse, order))


def table(name, p):
    print(name, " + ".join(f"({c})·ε^{e}·n^{n}" for (e, n, _), c in sorted(p.items())))


def main():
    # A1 and A2 without the factors 1/(1-eps) and 1-eps, which the code keeps apart.
    integrated(R, "C1", ORDER)
    integrated(compose(F(-1, 2), Z), "C2", ORDER)
    # I3 stands behind a factor f, so one order less is enough.
    order = ORDER - 1
    denominator = total((F(1, 2), product(total((1, ONE), (1, N)), LESS)), (F(1, 2), product(total((1, ONE), (-1, N)), R)))
    integrated(product(LESS, compose(-1, total((1, denominator), (-1, ONE)), order), order), "C3", order)


if __name__ == "__main__":
    main()
