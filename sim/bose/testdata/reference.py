# Evaluates cases of the solver with mpmath, independently of it: densities from their formulas, integrals by tanh-sinh
# quadrature at 25 digits. Reads JSON cases on standard input, writes for each the ground integral and, by one Newton step
# from the solver's answers, the relative errors of mu and of the critical sharpness.
import json, sys
from multiprocessing import Pool
from mpmath import mp, mpf, exp, expm1, log, sqrt, quad, gamma, beta as betaf, inf, pi, sin, cos, tanh

mp.dps = 25
names = dict(exp=exp, ln=log, sqrt=sqrt, sin=sin, cos=cos, tanh=tanh, abs=abs, max=max, min=min, pi=pi)


def density(law):
    """The density, the energies between which it is smooth, and its exponent at 0."""
    k = law["family"]
    if k == "power":
        t = mpf(law["theta"])
        return (lambda e: (t + 1) * e**t), [mpf(1)], t
    if k == "beta":
        a, b = mpf(law["a"]), mpf(law["b"])
        c = betaf(a, b)
        return (lambda e: exp(-a * e) * (-expm1(-e)) ** (b - 1) / c), [60 / a], b - 1
    if k == "uniform":
        low = mpf(law["low"])
        return (lambda e: exp(-e) / (1 - low)), [-log(low) if low > 0 else mpf(60)], 0
    if k == "gamma":
        s, c = mpf(law["shape"]), mpf(law["scale"])
        return (lambda e: (e / c) ** (s - 1) * exp(-e / c) / (c * gamma(s))), [(60 + 4 * s) * c], s - 1
    if k == "drawn":
        e, p = [mpf(x) for x, _ in law["knots"]], [mpf(y) for _, y in law["knots"]]
        e = [x - e[0] for x in e]
        total = sum((e[i + 1] - e[i]) * (p[i] + p[i + 1]) / 2 for i in range(len(e) - 1))

        def f(x):
            i = next(i for i in range(len(e) - 1) if x <= e[i + 1] or i == len(e) - 2)
            return (p[i] + (p[i + 1] - p[i]) * (x - e[i]) / (e[i + 1] - e[i])) / total
        return f, e[1:], (0 if p[0] > 0 else 1)
    if k == "formula":
        code = compile(law["density"].replace("^", "**"), "density", "eval")
        f = lambda x: mpf(eval(code, names, {"e": x}))
        ends = [mpf(x) for x in (law.get("kinks") or [])] + [mpf(law["top"])]
        t = mpf(law["exponent"])
        total = whole(f, [mpf(0)] + ends, t + 1)
        return (lambda x: f(x) / total), ends, t


def whole(g, pts, s):
    """The integral of g over the pieces; g ~ e^(s-1) at 0, straightened by e = a u^(1/s)."""
    a = pts[1]
    first = quad(lambda u: g(a * u ** (1 / s)) * a / s * u ** (1 / s - 1), [0, 1])
    rest = mpf(0)
    for lo, hi in zip(pts[1:], pts[2:]):
        if hi / lo > 3:
            rest += quad(lambda x: g(exp(x)) * exp(x), [log(lo), log(hi)])
        else:
            rest += quad(g, [lo, hi])
    return first + rest


def splits(ends, scales):
    """0, the ends, and powers of ten around the scales."""
    pts = set(ends)
    for s in scales:
        for j in range(-2, 3):
            pts.add(s * mpf(10) ** j)
    for a in sorted(scales)[:1]:
        x = a
        while x < ends[-1]:
            pts.add(x)
            x *= 30 if x > 1e-9 else 1e6
    return [mpf(0)] + sorted(x for x in pts if 0 < x <= ends[-1])


def integrals(f, ends, theta, b, mu):
    """I and, with p n (n+1), its derivatives, in one pass."""
    scales = [1 / b] + ([-mu] if mu < 0 else [])

    def g(e):
        x = b * (e - mu)
        if x > 80:
            return mpf(0)
        n = 1 / expm1(x)
        p = f(e)
        return mp.mpc(p * n, p * n * (n + 1) * (e if mu == 0 else 1))
    v = whole(g, splits(ends, scales), mpf(theta) + (1 if mu < 0 else 0))
    return v.real, v.imag


def check(c):
    law, b = c["law"], mpf(c["beta"])
    links, start, open = [mpf(x) for x in c["rule"]]
    r = links * (1 - open) / (links * (1 + open) + start)
    out = {}
    if law["family"] == "tiers":
        e = [mpf(x["energy"]) for x in law["tiers"]]
        w = [mpf(x["weight"]) for x in law["tiers"]]
        low, total = min(e), sum(w)
        mu = mpf(c["mu"])
        n = [1 / expm1(b * (x - low - mu)) for x in e]
        i = sum(y * m for y, m in zip(w, n)) / total
        d = b * sum(y * m * (m + 1) for y, m in zip(w, n)) / total
        out["mu"] = float((i - r) / (d * mu))
        return out
    f, ends, theta = density(law)
    if c.get("ground") is not None:
        i, _ = integrals(f, ends, theta, b, mpf(0))
        out["ground"] = float(mpf(c["ground"]) / i - 1)
    if c.get("mu"):
        mu = mpf(c["mu"])
        i, d = integrals(f, ends, theta, b, mu)
        out["mu"] = float((i - r) / (b * d * mu))
    if c.get("critical"):
        bc = mpf(c["critical"])
        i, d = integrals(f, ends, theta, bc, mpf(0))
        out["critical"] = float((i - r) / (-d * bc))
    return out


if __name__ == "__main__":
    with Pool(2) as pool:
        json.dump(pool.map(check, json.load(sys.stdin), chunksize=10), sys.stdout)
