"""Case "ten" by SciPy's implicit methods, 80 concentrations, sparse exact Jacobian. Prints one line of JSON: the faster one."""
import json
import time

import numpy as np
from scipy.integrate import solve_ivp
from scipy.sparse import lil_matrix

STAGES, PLACES = 10, 8
Q, V, PART, KA, CAPACITY, AFFINITY, SOLVENT = 0.2, 36.0, 60.0, 0.15, 12.0, 1.2, 1.0
HELD = V / 2
N = STAGES * PLACES


def rhs(feed):
    def f(_t, u):
        u = u.reshape(STAGES, PLACES)
        d = np.empty_like(u)
        aqueous = np.concatenate([[feed], u[:-1, 7]])
        organic = np.concatenate([u[1:, 0], [SOLVENT]])
        r = KA * V * (u[:, 4] - u[:, 3] / (AFFINITY * (CAPACITY - u[:, 3])))
        d[:, 4] = (Q * (aqueous - u[:, 4]) - r) / HELD
        d[:, 3] = (Q * (organic - u[:, 3]) + r) / HELD
        for k in (5, 6, 7):
            d[:, k] = Q / PART * (u[:, k - 1] - u[:, k])
        for k in (2, 1, 0):
            d[:, k] = Q / PART * (u[:, k + 1] - u[:, k])
        return d.ravel()

    return f


def jacobian(_t, u):
    j = lil_matrix((N, N))
    for s in range(STAGES):
        o = s * PLACES
        slope = CAPACITY / (AFFINITY * (CAPACITY - u[o + 3]) ** 2)
        for k in (0, 1, 2):
            j[o + k, o + k], j[o + k, o + k + 1] = -Q / PART, Q / PART
        for k in (5, 6, 7):
            j[o + k, o + k], j[o + k, o + k - 1] = -Q / PART, Q / PART
        j[o + 3, o + 3], j[o + 3, o + 4] = -(Q + KA * V * slope) / HELD, KA * V / HELD
        j[o + 4, o + 4], j[o + 4, o + 3] = -(Q + KA * V) / HELD, KA * V * slope / HELD
        if s > 0:
            j[o + 4, o - 1] = Q / HELD
        if s < STAGES - 1:
            j[o + 3, o + PLACES] = Q / HELD
    return j.tocsc()


def run(method, rtol):
    start = np.zeros((STAGES, PLACES))
    start[:, :4] = SOLVENT
    u, out = start.ravel(), []
    for feed, a, b in ((6.0, 0, 36), (8.0, 36, 144)):
        at = 600.0 * np.arange(a, b + 1)
        s = solve_ivp(rhs(feed), (at[0], at[-1]), u, method, at, rtol=rtol, atol=rtol * 1e-2, jac=jacobian)
        out.append(s.y[:, 1:])
        u = s.y[:, -1]
    return np.hstack(out)


reference = run("Radau", 1e-10)
best = None
for method in ("Radau", "BDF"):
    for rtol in (1e-3, 1e-4, 1e-5):
        began = time.perf_counter()
        y = run(method, rtol)
        ms = 1e3 * (time.perf_counter() - began)
        error = float(np.max(np.abs(y - reference) / (np.abs(reference) + 1e-3)))
        if error <= 1e-3 and (best is None or ms < best["median_ms"]):
            best = {"case": f"SciPy {method}", "rtol": rtol, "worst_error": error, "median_ms": ms, "steps": 0}
print(json.dumps(best))
