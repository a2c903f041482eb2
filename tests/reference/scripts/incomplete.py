"""Incomplete gamma and beta functions, ln beta, tails of the normal law, softplus and logistic: arguments exact, values to 20 digits.

Series of positive terms (DLMF 8.11.4 and 8.17.8), summed with mpmath at a precision that leaves 20 digits
after the complement is taken. Run from this folder; writes ../07_special/*.csv.
"""
import os, random
import mpmath as mp
OUT = os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "07_special")
rng = random.Random(20260301)
U = rng.uniform
L = lambda a, b: float(10 ** U(a, b))


def series(term_ratio, prec):
    """1 + r(0) + r(0) r(1) + ..., all terms positive."""
    term = total = mp.mpf(1); n = 0
    while True:
        term *= term_ratio(n); total += term; n += 1
        if term < total * mp.mpf(2) ** -prec and term_ratio(n) < 1: return total


def gamma_lower(a, x, prec):
    a, x = mp.mpf(a), mp.mpf(x)
    return a * mp.log(x) - x - mp.loggamma(a + 1) + mp.log(series(lambda n: x / (a + 1 + n), prec))


def beta_lower(a, b, x, prec):
    a, b, x = mp.mpf(a), mp.mpf(b), mp.mpf(x)
    front = a * mp.log(x) + b * mp.log1p(-x) - mp.log(mp.beta(a, b)) - mp.log(a)
    return front + mp.log(series(lambda n: (a + b + n) / (a + 1 + n) * x, prec))


def both(log_lower):
    """P, Q, ln P, ln Q; more precision until Q has at least 100 bits."""
    prec = 250
    while True:
        with mp.workprec(prec + 50):
            l = log_lower(prec); q = -mp.expm1(l)
            if q > mp.mpf(2) ** (100 - prec) or prec > 12000: return mp.exp(l), q, l, mp.log(q)
        prec *= 2


def write(name, header, rows):
    with open(os.path.join(OUT, name + ".csv"), "w") as f:
        f.write(header + "\n")
        for args, values in rows:
            f.write(",".join([repr(v) for v in args] + [mp.nstr(v, 20) for v in values]) + "\n")


pairs = [(1.0, 1.0), (0.5, 0.5), (1e-3, 0.3), (1e-10, 0.5), (1e-3, 1e-30), (0.001, 5.0), (30.0, 0.5), (100.0, 500.0), (2000.0, 1500.0), (2000.0, 2900.0), (1000.0, 1000.0), (999.0, 1001.0), (5000.0, 5000.0)]
pairs += [(L(-4, .5), L(-6, 1.5)) for _ in range(40)]
for _ in range(50):
    a = L(0, 3.5); pairs.append((a, max(1e-3, a + U(-7, 7) * a ** .5)))
write("incomplete_gamma", "a,x,p,q,ln_p,ln_q", [((a, x), both(lambda p: gamma_lower(a, x, p))) for a, x in pairs])

triples = [(1.0, 1.0, 0.25), (0.5, 0.5, 0.5), (1e-3, 1e-3, 0.2), (1e-10, 2.5, 0.3), (2.0, 1e-6, 0.5), (0.001, 30.0, 0.01), (50.0, 2.0, 0.5), (3000.0, 2000.0, 0.58), (1500.0, 1500.0, 0.54), (2.0, 5000.0, 1e-4)]
triples += [(L(-4, 0), L(-4, 1), U(0, .95)) for _ in range(30)] + [(L(-3, 2), L(-3, 2), U(0.02, .98)) for _ in range(30)]
for _ in range(50):
    a, b = L(0, 3.5), L(0, 3.5); m = a / (a + b); s = (m * (1 - m) / (a + b)) ** .5
    triples.append((a, b, min(max(m + U(-8, 8) * s, 1e-6), 0.98)))
write("incomplete_beta", "a,b,x,i,ic,ln_i,ln_ic", [((a, b, x), both(lambda p: beta_lower(a, b, x, p))) for a, b, x in triples])

mp.mp.prec = 300
ab = [(L(-6, 9), L(-6, 9)) for _ in range(80)] + [(L(-1, 1), L(3, 200)) for _ in range(20)]
write("ln_beta", "a,b,y", [((a, b), (mp.loggamma(mp.mpf(a)) + mp.loggamma(mp.mpf(b)) - mp.loggamma(mp.mpf(a) + mp.mpf(b)) if max(a, b) < 1e30 else mp.loggamma(mp.mpf(a)) - mp.mpf(a) * mp.log(mp.mpf(b)),)) for a, b in ab])
mp.mp.prec = 4000
xs = [-1e10, -1e5, -1000.0, -50.0, -38.5, 8.0, 20.0, 35.0] + [U(-40, 8) for _ in range(60)] + [rng.choice((-1, 1)) * L(-10, 0.5) for _ in range(30)]
cdf = lambda x: mp.erfc(-mp.mpf(x) / mp.sqrt(2)) / 2
def ln_cdf(x):
    if x > -1e4: return mp.log(cdf(x))
    z = mp.mpf(-x); s = t = mp.mpf(1)  # asymptotic series, DLMF 7.12.1
    for n in range(1, 9): t *= -(2 * n - 1) / z ** 2; s += t
    return -z * z / 2 - mp.log(z * mp.sqrt(2 * mp.pi)) + mp.log(s)
write("ln_normal_cdf", "x,y", [((x,), (ln_cdf(x),)) for x in xs])
mp.mp.prec = 1500
xs = [0.0, -745.0, -700.0, 700.0, 40.0, -40.0] + [U(-40, 40) for _ in range(60)] + [rng.choice((-1, 1)) * L(-10, 0.5) for _ in range(40)]
write("softplus", "x,y", [((x,), (mp.log1p(mp.exp(mp.mpf(x))),)) for x in xs])
write("logistic", "x,y", [((x,), (1 / (1 + mp.exp(-mp.mpf(x))),)) for x in xs])
xs = [U(-700, 700) for _ in range(20)] + [U(-3, 3) for _ in range(30)] + [rng.choice((-1, 1)) * L(-10, 0.5) for _ in range(40)]
write("sinh", "x,y", [((x,), (mp.sinh(mp.mpf(x)),)) for x in xs])
write("cosh", "x,y", [((x,), (mp.cosh(mp.mpf(x)),)) for x in xs])
write("tan", "x,y", [((x,), (mp.tan(mp.mpf(x)),)) for x in xs])
write("atan", "x,y", [((x,), (mp.atan(mp.mpf(x)),)) for x in xs])
xs = [U(-1, 1) for _ in range(60)] + [rng.choice((-1, 1)) * L(-10, 0) for _ in range(20)] + [1.0, -1.0]
write("asin", "x,y", [((x,), (mp.asin(mp.mpf(x)),)) for x in xs])
write("acos", "x,y", [((x,), (mp.acos(mp.mpf(x)),)) for x in xs])
xy = [(L(-5, 5), U(-10, 10)) for _ in range(60)] + [(1 + rng.choice((-1, 1)) * L(-8, -1), L(0, 6)) for _ in range(30)] + [(L(-300, 300), U(-1, 1)) for _ in range(20)]
write("power", "x,y,value", [((x, y), (mp.mpf(x) ** mp.mpf(y),)) for x, y in xy])
