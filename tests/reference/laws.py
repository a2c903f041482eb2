"""Reference values of laws: laws.csv, from the densities and special functions at 60 digits (mpmath).

Each row is checked against scipy.stats where that has the law and keeps its digits: a second author of the
same formulas. Run: python laws.py > laws.csv (mpmath 1.4.1, scipy 1.17.1).
"""
from mpmath import *
import math, sys
import scipy.stats

mp.dps = 60
LN2PI = log(2 * pi)


class stats:
    """scipy.stats, which wants doubles."""


for law in ("norm lognorm t cauchy laplace logistic halfnorm halfcauchy expon gamma invgamma weibull_min gumbel_r "
            "beta uniform poisson binom nbinom geom bernoulli").split():
    def frozen(*p, law=getattr(scipy.stats, law), **named):
        return law(*map(float, p), **{key: float(value) for key, value in named.items()})
    setattr(stats, law, frozen)


def P(a, x):
    return gammainc(a, 0, x, regularized=True)


def Q(a, x):
    return gammainc(a, x, inf, regularized=True)


def I(a, b, x):
    """Regularised incomplete beta, by its positive series on the side where it is small enough."""
    a, b, x = mpf(a), mpf(b), mpf(x)
    if x <= 0:
        return mpf(0)
    if x >= 1:
        return mpf(1)
    front = exp(a * log(x) + b * log1p(-x) - loggamma(a) - loggamma(b) + loggamma(a + b)) / a
    return front * hyp2f1(1, a + b, a + 1, x)


def continuous(ld, cdf, sf, dist):
    return lambda x, *p: (ld(x, *p), cdf(x, *p), sf(x, *p), dist(*map(float, p)))


def Phi(z):
    return erfc(-z / sqrt(2)) / 2


def normal(x, m, s):
    z = (x - m) / s
    return -z * z / 2 - log(s) - LN2PI / 2, Phi(z), Phi(-z), stats.norm(m, s)


def lognormal(x, m, s):
    d, c, u, _ = normal(log(x), m, s)
    return d - log(x), c, u, stats.lognorm(float(s), scale=math.exp(m))


def student(x, n, m, s):
    z = (x - m) / s
    ld = -(n + 1) / 2 * log1p(z * z / n) - log(s) - log(n) / 2 - log(beta(n / 2, mpf(1) / 2))
    tail = I(n / 2, mpf(1) / 2, n / (n + z * z)) / 2 if z != 0 else mpf(1) / 2
    c, u = (tail, 1 - tail) if z < 0 else (1 - tail, tail)
    return ld, c, u, stats.t(float(n), m, s)


def cauchy(x, m, s):
    z = (x - m) / s
    tail = atan2(1, abs(z)) / pi
    c, u = (tail, 1 - tail) if z < 0 else (1 - tail, tail)
    return -log1p(z * z) - log(s) - log(pi), c, u, stats.cauchy(m, s)


def laplace(x, m, s):
    z = (x - m) / s
    tail = exp(-abs(z)) / 2
    c, u = (tail, 1 - tail) if z < 0 else (1 - tail, tail)
    return -abs(z) - log(2 * s), c, u, stats.laplace(m, s)


def logistic(x, m, s):
    z = (x - m) / s
    return -z - 2 * log1p(exp(-z)) - log(s), 1 / (1 + exp(-z)), 1 / (1 + exp(z)), stats.logistic(m, s)


def half_normal(x, s):
    z = x / s
    return log(sqrt(2 / pi)) - z * z / 2 - log(s), erf(z / sqrt(2)), erfc(z / sqrt(2)), stats.halfnorm(0, s)


def half_cauchy(x, s):
    z = x / s
    return log(2 / pi) - log1p(z * z) - log(s), 2 * atan(z) / pi, 2 * atan2(1, z) / pi, stats.halfcauchy(0, s)


def exponential(x, r):
    return log(r) - r * x, -expm1(-r * x), exp(-r * x), stats.expon(scale=1 / float(r))


def gamma_(x, a, r):
    return (a * log(r) + (a - 1) * log(x) - r * x - loggamma(a), P(a, r * x), Q(a, r * x),
            stats.gamma(float(a), scale=1 / float(r)))


def inverse_gamma(x, a, s):
    return (a * log(s) - (a + 1) * log(x) - s / x - loggamma(a), Q(a, s / x), P(a, s / x),
            stats.invgamma(float(a), scale=float(s)))


def weibull(x, k, s):
    h = (x / s) ** k
    return log(k / s) + (k - 1) * log(x / s) - h, -expm1(-h), exp(-h), stats.weibull_min(float(k), scale=float(s))


def gumbel(x, m, s):
    z = (x - m) / s
    h = exp(-z)
    return -z - h - log(s), exp(-h), -expm1(-h), stats.gumbel_r(m, s)


def beta_(x, a, b):
    c = I(a, b, x)
    u = 1 - c if c < mpf(1) / 2 else I(b, a, 1 - x)
    return (a - 1) * log(x) + (b - 1) * log1p(-x) - log(beta(a, b)), c, u, stats.beta(a, b)


def uniform(x, a, b):
    return -log(b - a), (x - a) / (b - a), (b - x) / (b - a), stats.uniform(a, b - a)


def poisson(x, m):
    if m == 0:
        return mpf(0) if x == 0 else -inf, mpf(1), mpf(0), stats.poisson(0)
    return x * log(m) - m - loggamma(x + 1), Q(x + 1, m), P(x + 1, m), stats.poisson(float(m))


def binomial(x, n, p, q=None):
    q = 1 - p if q is None else q
    return (log(binomial_coefficient(n, x)) + x * log(p) + (n - x) * log(q),
            I(n - x, x + 1, q) if x < n else mpf(1), I(x + 1, n - x, p) if x < n else mpf(0),
            stats.binom(int(n), float(p)))


def binomial_coefficient(n, x):
    return exp(loggamma(n + 1) - loggamma(x + 1) - loggamma(n - x + 1))


def negative_binomial(x, r, success, failure):
    return (loggamma(x + r) - loggamma(r) - loggamma(x + 1) + r * log(success) + x * log(failure),
            I(r, x + 1, success), I(x + 1, r, failure), stats.nbinom(float(r), float(success)))


def geometric(x, p):
    return log(p) + x * log1p(-p), -expm1((x + 1) * log1p(-p)), exp((x + 1) * log1p(-p)), stats.geom(float(p), loc=-1)


def categorical(x, *p):
    x = int(x)
    return log(p[x - 1]), fsum(p[:x]), fsum(p[x:]), None


def odds(t):
    return 1 / (1 + exp(-t)), 1 / (1 + exp(t))


# name, names of the parameters, function of x and parameters, parameter sets, points
REAL = [-1e6, -300.0, -37.5, -8.25, -2.0, -0.5, 0.0, 1e-9, 0.3, 1.0, 2.75, 9.0, 38.0, 250.0, 1e6]
POSITIVE = [1e-300, 1e-20, 1e-5, 0.04, 0.5, 1.0, 2.75, 9.0, 38.0, 250.0, 1e4]
COUNT = [0, 1, 2, 3, 7, 12, 40, 150, 1000]
FORMS = [
    ("bernoulli", "probability", lambda x, p: (log(p if x else 1 - p), mpf(1) if x else 1 - p, mpf(0) if x else p, stats.bernoulli(float(p))),
     [[0.3], [1e-12], [0.999]], [0, 1]),
    ("bernoulli", "log_odds", lambda x, t: (log(odds(t)[0 if x else 1]), mpf(1) if x else odds(t)[1], mpf(0) if x else odds(t)[0], stats.bernoulli(float(odds(t)[0]))),
     [[-0.4], [40.0], [-700.0], [3.25]], [0, 1]),
    ("beta", "alpha,beta", beta_, [[0.5, 0.5], [2.0, 3.5], [1.0, 1.0], [200.0, 700.0], [0.01, 4.0]],
     [1e-200, 1e-12, 1e-3, 0.1, 0.25, 0.5, 0.75, 0.9, 0.999]),
    ("binomial", "trials,probability", binomial, [[20, 0.3], [1000, 0.01], [50, 0.97], [100000, 0.5]], [0, 1, 3, 7, 12, 20, 48, 50, 500, 49800, 51000]),
    ("binomial", "trials,log_odds", lambda x, n, t: binomial(x, n, *odds(t)), [[20, -0.75], [50, 35.0], [1000, -4.5]], [0, 1, 3, 12, 20, 48, 49, 60]),
    ("categorical", "probabilities", categorical, [[0.25, 0.5, 0.125, 0.125], [1.0], [1e-9, 1 - 1e-9]], [1, 2, 3, 4]),
    ("cauchy", "location,scale", cauchy, [[0.0, 1.0], [2.0, 0.25]], REAL),
    ("exponential", "rate", exponential, [[1.0], [0.004], [30.0]], [0.0] + POSITIVE),
    ("exponential", "mean", lambda x, m: exponential(x, 1 / m), [[1.0], [250.0]], [0.0] + POSITIVE),
    ("gamma", "shape,rate", gamma_, [[2.0, 1.0], [0.1, 1.0], [35.5, 4.0], [0.001, 2.0]], POSITIVE),
    ("gamma", "shape,scale", lambda x, a, s: gamma_(x, a, 1 / s), [[2.5, 3.0], [400.0, 0.1]], POSITIVE),
    ("gamma", "mean,sd", lambda x, m, s: gamma_(x, (m / s) ** 2, m / s**2), [[3.0, 1.5], [0.5, 2.0]], POSITIVE),
    ("geometric", "probability", geometric, [[0.2], [1e-6], [0.9]], COUNT),
    ("gumbel", "location,scale", gumbel, [[0.0, 1.0], [5.0, 2.5]], [-300.0, -30.0, -8.25, -2.0, -0.5, 0.0, 1e-9, 0.3, 1.0, 2.75, 9.0, 38.0, 60.0, 250.0, 1e4]),
    ("half_cauchy", "scale", half_cauchy, [[1.0], [25.0]], [0.0] + POSITIVE),
    ("half_normal", "scale", half_normal, [[1.0], [25.0]], [0.0] + POSITIVE[:-1]),
    ("inverse_gamma", "shape,scale", inverse_gamma, [[2.0, 1.0], [0.1, 0.1], [40.0, 90.0]], [0.002] + POSITIVE[3:]),
    ("laplace", "location,scale", laplace, [[0.0, 1.0], [2.0, 0.25]], REAL),
    ("logistic", "location,scale", logistic, [[0.0, 1.0], [2.0, 0.25]], REAL),
    ("lognormal", "log_mean,log_sd", lognormal, [[0.0, 1.0], [1.5, 0.2]], POSITIVE),
    ("negative_binomial", "mean,shape", lambda x, m, r: negative_binomial(x, r, r / (r + m), m / (r + m)),
     [[3.0, 0.5], [100.0, 8.0], [5.0, 1e7], [0.01, 2.0]], COUNT),
    ("negative_binomial", "successes,probability", lambda x, r, p: negative_binomial(x, r, p, 1 - p), [[4.0, 0.3], [0.2, 0.01]], COUNT),
    ("normal", "mean,sd", normal, [[0.0, 1.0], [2.0, 0.25], [-1.0, 1000.0]], REAL),
    ("normal", "mean,precision", lambda x, m, t: normal(x, m, 1 / sqrt(t)), [[0.0, 1.0], [2.0, 16.0], [1.0, 0.003]], REAL),
    ("poisson", "mean", poisson, [[0.0], [1e-8], [2.5], [39.0], [900.0]], COUNT),
    ("student", "degrees,location,scale", student, [[4.0, 0.0, 1.0], [1.0, 0.5, 2.0], [0.3, 0.0, 1.0], [1e4, 0.0, 1.0], [30.0, 1.0, 0.125]], REAL),
    ("uniform", "from,to", uniform, [[-1.0, 3.0], [0.0, 1e9]], [-0.5, 0.0, 0.3, 1.0, 2.75]),
    ("weibull", "shape,scale", weibull, [[1.5, 2.0], [0.3, 10.0], [12.0, 30.0]], POSITIVE),
]


def number(v):
    if v == -inf:
        return "-inf"
    return nstr(v, 20, strip_zeros=True, min_fixed=-5, max_fixed=6)


def agree(ours, theirs, what):
    theirs = float(theirs)
    if not math.isfinite(theirs) or abs(theirs) < 1e-250:
        return
    if abs(float(ours) - theirs) > 1e-7 * abs(theirs) + 1e-12:
        print("scipy differs:", what, float(ours), theirs, file=sys.stderr)


print("law,parameters,values,x,log_density,ln_distribution,ln_survival")
for name, names, function, sets, points in FORMS:
    for p in sets:
        for x in points:
            ld, c, u, dist = (None,) * 4
            if name == "binomial" and x > p[0] or name == "categorical" and x > len(p) or name == "uniform" and x < p[0]:
                continue
            exact = [mpf(v) for v in p]
            ld, c, u, dist = function(mpf(x), *exact)
            if dist is not None and not (names == "trials,log_odds" and p[1] > 30):
                what = (name, names, p, x)
                discrete = hasattr(dist, "pmf") and isinstance(dist.dist, scipy.stats.rv_discrete)
                agree(ld, (dist.logpmf if discrete else dist.logpdf)(x), what + ("density",))
                agree(c, dist.cdf(x), what + ("distribution",))
                agree(u, dist.sf(x), what + ("survival",))
            lnc = log(c) if c > 0 else -inf
            lnu = log(u) if u > 0 else -inf
            if c > mpf(1) / 2 and u > 0:
                lnc = log1p(-u)
            if u > mpf(1) / 2 and c > 0:
                lnu = log1p(-c)
            print(",".join([name, names.replace(",", " "), " ".join(map(repr, p)), repr(x), number(ld), number(lnc), number(lnu)]))
