# The same solve with curves by a general-purpose library: scipy's quad, asked for 1e-11, and brentq. Prints the milliseconds it takes for a
# few laws; ./build.sh bench sets them beside the solver's.
import json, math, sys, time
from scipy.integrate import quad
from scipy.optimize import brentq

laws = {
    "condensate": (lambda e: 2 * e, 1.0, 3.0, True),
    "fit-get-rich": (lambda e: 1.2 * e**0.2, 1.0, 1.0, True),
    "gamma": (lambda e: e**-0.3 * math.exp(-e) / math.gamma(0.7), 60.0, 2.0, False),
    "formula": (lambda e: e * math.exp(-3 * e) + 0.2 * e**4, 2.0, 3.0, True),
}


def solve(p, top, beta, condenses):
    total = quad(p, 0, top)[0]

    def integral(b, mu):
        return quad(lambda e: p(e) / math.expm1(b * (e - mu)) if b * (e - mu) < 700 else 0.0, 0, top, limit=500, epsabs=0, epsrel=1e-11)[0] / total

    def potential(b):
        if condenses and integral(b, -1e-13) < 1:
            return 0.0
        return brentq(lambda mu: integral(b, mu) - 1, -math.log(2) / b - 1e-3, -1e-13, xtol=1e-13) if integral(b, -1e-13) > 1 else 0.0

    out = [potential(beta)]
    if condenses:
        out.append(brentq(lambda x: math.log(integral(math.exp(x), -1e-13)), math.log(1e-3), math.log(1e4)))
    mu = out[0]
    for i in range(400):
        e = top * ((i + 0.02) / 399) ** 2
        out += [p(e), math.exp(-beta * (e - mu)), 1 / math.expm1(beta * (e - mu)) if e > mu else 0]
    for i in range(1, 57):
        out.append(potential(10 * i / 56))
    return out


times = {}
for name, (p, top, beta, condenses) in laws.items():
    begun = time.perf_counter()
    solve(p, top, beta, condenses)
    times[name] = 1000 * (time.perf_counter() - begun)
json.dump(times, sys.stdout)
