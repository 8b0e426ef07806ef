#!/usr/bin/env python3
"""Reference values for a two-metal circuit with scrub and reflux, from SciPy alone.

The invented plant of scenarios/mulga-two-metals.yaml at constant flows: start-up from barren, then 20 % more of
metal B in the liquor from 12 h on. Written as two-metals.json beside this file.

Run:  python3 make_two_metals.py [folder]      (NumPy and SciPy are all it needs)

Model.  States are concentrations; flows are constant, so every volume is. A stage is a perfectly mixed mixer that
holds the phases in the ratio of their flows, and one mixed layer of each phase behind it. Both metals compete for one
extractant, c_o = K c_a F^2 / acid^2 with F = E - sum n c_o, and set acid free as they are extracted: the acid has a
balance of its own here, N of metal adding r N. Transfer is N = k V (c_a - c_a*), k V = Q_a e/(1 - e).

Units: m3, h, kg, and kg/m3 = g/L.
"""
import json
import sys
from pathlib import Path

import numpy as np
import scipy
from scipy.integrate import solve_ivp

K, N_SITES, RELEASE = np.array([16.0, 0.25]), np.array([1.0, 1.1]), np.array([1.543, 1.7])
EXTRACTANT, EFFICIENCY = 11.0, 0.92
ORGANIC, SCRUB, STRIP, LIQUOR = 38.0, 4.0, 8.0, 60.0
TANK = 30.0
STEP_AT, END = 12.0, 24.0

#        stages, aqueous flow, mixer, aqueous layer, organic layer
TRAINS = {
    "extraction": (4, LIQUOR + SCRUB, 5.1, 8.53, 5.07),
    "scrub": (2, SCRUB, 2.1, 0.533, 5.07),
    "strip": (2, STRIP, 2.3, 1.07, 5.07),
}
# State of a stage: mixer A, B, acid, organic A, B; aqueous layer A, B, acid; organic layer A, B.
WIDTH = 10


def offsets():
    at, found = 0, {}
    for name, (n, *_) in TRAINS.items():
        found[name] = at
        at += n * WIDTH
    return found, at


AT, TANK_AT = offsets()
SIZE = TANK_AT + 2


def train(name, y, dy, aqueous_in, organic_in):
    """Rates of one train; returns what leaves it, (aqueous A, B, acid) and (organic A, B)."""
    n, qa, mixer, layer_a, layer_o = TRAINS[name]
    qo = ORGANIC
    vo = mixer * qo / (qa + qo)
    va = mixer - vo
    s = y[AT[name]:AT[name] + n * WIDTH].reshape(n, WIDTH)
    ds = dy[AT[name]:AT[name] + n * WIDTH].reshape(n, WIDTH)
    for j in range(n):
        ca, acid, co = s[j, 0:2], s[j, 2], s[j, 3:5]
        into_a = aqueous_in if j == 0 else s[j - 1, 5:8]
        into_o = organic_in if j == n - 1 else s[j + 1, 8:10]
        free = EXTRACTANT - N_SITES @ co
        star = co * acid**2 / (K * free**2)
        moved = qa * EFFICIENCY / (1 - EFFICIENCY) * (ca - star)
        ds[j, 0:2] = (qa * (into_a[0:2] - ca) - moved) / va
        ds[j, 2] = (qa * (into_a[2] - acid) + RELEASE @ moved) / va
        ds[j, 3:5] = (qo * (into_o - co) + moved) / vo
        ds[j, 5:8] = qa * (s[j, 0:3] - s[j, 5:8]) / layer_a
        ds[j, 8:10] = qo * (co - s[j, 8:10]) / layer_o
    return s[n - 1, 5:8], s[0, 8:10]


def rates(b_in_liquor):
    liquor = np.array([4.0, b_in_liquor, 2.0])

    def f(_, y):
        dy = np.zeros_like(y)
        out = {}
        loaded = y[AT["extraction"] + 8:AT["extraction"] + 10]
        scrubbed = y[AT["scrub"] + 8:AT["scrub"] + 10]
        spent, _ = train("scrub", y, dy, np.array([0, 0, 25.0]), loaded)
        feed = (LIQUOR * liquor + SCRUB * spent) / (LIQUOR + SCRUB)
        train("extraction", y, dy, feed, y[TANK_AT:])
        _, stripped = train("strip", y, dy, np.array([0, 0, 180.0]), scrubbed)
        dy[TANK_AT:] = ORGANIC * (stripped - y[TANK_AT:]) / TANK
        return dy

    return f


def barren():
    y = np.zeros(SIZE)
    acid = {"extraction": (LIQUOR * 2.0 + SCRUB * 25.0) / (LIQUOR + SCRUB), "scrub": 25.0, "strip": 180.0}
    for name, (n, *_) in TRAINS.items():
        s = y[AT[name]:AT[name] + n * WIDTH].reshape(n, WIDTH)
        s[:, 2] = s[:, 7] = acid[name]
    return y


def outputs(y):
    def last(name, columns):
        n = TRAINS[name][0]
        return list(y[AT[name] + (n - 1) * WIDTH + columns[0]:AT[name] + (n - 1) * WIDTH + columns[1]])

    first = lambda name: list(y[AT[name] + 8:AT[name] + 10])
    return last("extraction", (5, 8)) + last("strip", (5, 8)) + last("scrub", (5, 7)) + first("extraction") + list(y[TANK_AT:])


COLUMNS = [
    "raffinate.A", "raffinate.B", "raffinate.acid", "product.A", "product.B", "product.acid",
    "spent scrub.A", "spent scrub.B", "loaded organic.A", "loaded organic.B", "organic tank.A", "organic tank.B",
]


def main(folder):
    hours, values = [], []
    y = barren()
    for b, start, end in ((6.0, 0.0, STEP_AT), (7.2, STEP_AT, END)):
        times = np.arange(start, end + 1e-9, 1.0)
        run = solve_ivp(rates(b), (start, end), y, method="Radau", rtol=1e-11, atol=1e-13, t_eval=times)
        assert run.success, run.message
        skip = 1 if hours else 0
        hours += list(times[skip:])
        values += [outputs(run.y[:, k]) for k in range(skip, len(times))]
        y = run.y[:, -1]
    path = Path(folder) / "two-metals.json"
    path.write_text(json.dumps({
        "made_by": f"make_two_metals.py, SciPy {scipy.__version__}, Radau, rtol 1e-11",
        "columns": COLUMNS,
        "hours": hours,
        "values": values,
    }, indent=1) + "\n")


if __name__ == "__main__":
    main(sys.argv[1] if len(sys.argv) > 1 else Path(__file__).parent)
