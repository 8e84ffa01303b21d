"""The problems P1, P2 and P3 of README.md through solve_ivp of SciPy, with banded Jacobians (that of LSODA by differences).

    peers.py tune                          the tolerance that each problem, method and error asks for
    peers.py time PROBLEM METHOD RTOL      microseconds of processor time per path
    peers.py profile PROBLEM CELLS         the profile at the end, integrated to 1e-9

All is in um, years and K; the equations are those of cvode.c.
"""
import sys
import time

import numpy as np
from scipy.integrate import solve_ivp
from scipy.sparse import diags

GAS, ZERO, YEAR = 8.314462618, 273.15, 31557600.0
COUPLING = -26700.0
METHODS = ("SciPy-LSODA", "SciPy-BDF", "SciPy-Radau")
# tolerances of the reference and of what it is checked with
TIGHT, LOOSER = 1e-12, 1e-11


def hold(years, temp):
    return years, lambda t: temp + ZERO


def ramp(years, low, high):
    return years, lambda t: low + (high - low) * t / years + ZERO


def relax(years, low, high, tau):
    return years, lambda t: high + (low - high) * np.exp(-t / tau) + ZERO


def pulse_train():
    legs = [hold(100, 690)]
    for i in range(10):
        legs += [ramp(5, 690, 780), hold(20, 780), relax(175 if i < 9 else 75, 780, 690, 15)]
    return legs


def box():
    week = 7 / 365.25
    return [ramp(0.5, 1150, 1100), hold(week, 1200), ramp(0.5 - week, 1100 - 100 * week, 1050)]


def host(x):
    return 0.25 + 0.10 * (1 + np.tanh((x - 80) / 3)) - 0.075 * (1 + np.tanh((x - 160) / 3))


class Problem:
    def __init__(self, name, cells=200):
        self.name, self.cells = name, cells
        ball = name == "P3"
        self.size = 300.0 if ball else 200.0
        self.range = 0.1 if ball else 60.0
        d0, energy = {"P1": (7.01e-8, 273e3), "P2": (2.92 * 10**-4.08, 276e3), "P3": (10**-9.21, 201e3)}[name]
        self.ln_d, self.cold = np.log(d0 * 1e12 * YEAR), energy / GAS
        self.legs = box() if ball else pulse_train()
        h = self.size / cells
        face, middle = np.arange(1, cells + 1) * h, (np.arange(cells) + 0.5) * h
        distance = np.full(cells, h)
        distance[-1] = h / 2
        self.conduct = 1 / distance
        self.volume = np.full(cells, h)
        self.start = np.where(middle < 80, 100.0, np.where(middle < 160, 40.0, 70.0))
        if ball:
            self.conduct *= (face / self.size) ** 2
            self.volume = self.size * np.diff(np.append(0, face / self.size) ** 3) / 3
            self.start = np.where(middle < 150, 0.1, 0.2)
        if name == "P2":
            self.conduct *= 10 ** (-4.1 * host(face))
            self.slope = host(np.append(middle[1:], self.size)) - host(middle)
        self.temp = None

    def conditions(self, t):
        temp = self.temp(t)
        pull, rim = 0.0, 0.25 if self.name == "P3" else 70.0
        if self.name == "P2":
            pull = COUPLING / (2 * GAS * temp)
            rim = 100 * np.exp(COUPLING / GAS * 0.30 * (1 / temp - 1 / 1023.15))
        return np.exp(self.ln_d - self.cold / temp), pull, rim

    def rates(self, t, c):
        g, pull, rim = self.conditions(t)
        all_c = np.append(c, rim)
        flux = all_c[:-1] - all_c[1:]
        if self.name == "P2":
            flux += (all_c[:-1] + all_c[1:]) * (pull * self.slope)
        elif self.name == "P3":
            own = np.exp(3 * np.log(10) * (all_c - 0.1))
            flux *= 0.5 * (own[:-1] + own[1:])
        flux *= g * self.conduct
        net = -flux
        net[1:] += flux[:-1]
        return net / self.volume

    def jacobian(self, t, c):
        g, pull, rim = self.conditions(t)
        k = g * self.conduct
        inside, outside = k, -k  # derivatives of the fluxes by the values on both sides
        if self.name == "P2":
            inside, outside = k * (1 + pull * self.slope), k * (pull * self.slope - 1)
        elif self.name == "P3":
            all_c = np.append(c, rim)
            own = np.exp(3 * np.log(10) * (all_c - 0.1))
            mean, half = 0.5 * (own[:-1] + own[1:]), 1.5 * np.log(10) * (all_c[:-1] - all_c[1:])
            inside, outside = k * (mean + half * own[:-1]), k * (half * own[1:] - mean)
        main = -inside
        main[1:] += outside[:-1]
        bands = [-outside[:-1] / self.volume[:-1], main / self.volume, inside[:-1] / self.volume[1:]]
        return diags(bands, [1, 0, -1], format="csc")

    def solve(self, method, rtol):
        c = self.start
        kind = method.removeprefix("SciPy-")
        how = {"lband": 1, "uband": 1} if kind == "LSODA" else {"jac": self.jacobian}
        for years, self.temp in self.legs:  # restarts at each break point
            run = solve_ivp(self.rates, (0, years), c, method=kind, rtol=rtol, atol=rtol * self.range, t_eval=(years,), **how)
            if not run.success:
                sys.exit(f"peers.py: {run.message}")
            c = run.y[:, -1]
        return c

    def error(self, a, b):
        return np.abs(a - b).max() / self.range

    def reference(self):
        c = self.solve("SciPy-LSODA", TIGHT)
        if not (worst := self.error(c, self.solve("SciPy-LSODA", LOOSER))) <= 1e-9:
            sys.exit(f"peers.py: the reference of {self.name} is only good to {worst:.2g}")
        return c


def tune():
    tolerances = [10 ** (-k / 2) for k in range(4, 17)]
    for name in ("P1", "P2", "P3"):
        p = Problem(name)
        truth = p.reference()
        for method in METHODS:
            errors = [p.error(p.solve(method, rtol), truth) for rtol in tolerances]
            for wanted in (1e-3, 1e-4):
                met = [e <= wanted for e in errors]
                first = met.index(True)
                safe = len(met) - met[::-1].index(False) if False in met else 0
                for k, chosen in ((first, "first"), (safe, "safe")):
                    print(name, method, f"{wanted:g} {tolerances[k]:.3g} {errors[k]:.2g}", chosen, flush=True)


def clock(name, method, rtol):
    Problem(name).solve(method, rtol)
    begin, paths = time.process_time(), 0
    while (spent := time.process_time() - begin) < 0.3:
        Problem(name).solve(method, rtol)
        paths += 1
    print(f"{1e6 * spent / paths:.2f}")


def main(args):
    match args:
        case ["tune"]:
            tune()
        case ["time", name, method, rtol]:
            clock(name, method, float(rtol))
        case ["profile", name, cells]:
            print("\n".join(f"{v:.17g}" for v in Problem(name, int(cells)).reference()))
        case _:
            sys.exit(__doc__)


main(sys.argv[1:])
