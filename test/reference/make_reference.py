#!/usr/bin/env python3
"""Reference values for counter-current mixer-settler cascades, from SciPy alone.

Three invented plants are integrated with `solve_ivp(method="Radau")` at tolerances far below
those of any practical run, and written as JSON beside this file:

    ten.json                one train of ten stages, Langmuir isotherm, one step of the feed
    closed-circuit.json     extraction and strip around one organic loop, acid set free and taken up
    carboxylic-table.json   six stages on a measured isotherm through a monotone cubic

Run:  python3 make_reference.py [folder]      (NumPy and SciPy are all it needs)

Model.  A stage is a liquid-full, perfectly mixed mixer of volume V followed by a settler whose two
layers are n equal, perfectly mixed parts each.  States are amounts (kg) and the organic volume of
the mixer, so a flux that leaves one vessel enters another unchanged.

* Mixer outflow is Qa + Qo of one dispersion, so a content m leaves at m (Qa + Qo)/V, whatever V_o is.
* Each stage keeps its volume of each phase.  A phase thus leaves a stage at the rate at which it
  enters, and the settler layer gives or takes what the mixer's V_o takes or gives.
* A layer of changing volume keeps n equal parts; each then grows at (q_in - q_out)/n, hence the
  flow behind part k is q_in + (q_out - q_in) k/n.
* With x mass of acid set free per mass of solute extracted, transfer N removes N of solute and adds
  x N of acid.  w = acid + x solute is therefore untouched by transfer and only flows.

Units: m, s, kg, and kg/m3 = g/L.
"""
import json
import sys
from pathlib import Path

import numpy as np
import scipy
from scipy.interpolate import PchipInterpolator
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

HOUR = 3600.0
RTOL, ATOL = 1e-11, 1e-13


# ---------------------------------------------------------------- equilibrium: c_a* of c_o

def langmuir(capacity, affinity):
    """c_o = capacity b c_a / (1 + b c_a), solved for c_a."""
    return lambda co, acid: co / (affinity * (capacity - co))


def exchange(constant, extractant, per_solute, p, q):
    """c_o / c_a = K F^p / acid^q with the free extractant F = extractant - n c_o.

    Loading stays below 85 % and acid above 1 g/L in every run here, so neither an overloaded organic
    nor a rounding of acid near zero needs a law of its own.
    """
    return lambda co, acid: co * acid**q / (constant * (extractant - per_solute * co) ** p)


class Table:
    """Monotone cubic of c_o(c_a): SciPy's PchipInterpolator (Fritsch & Butland, SIAM J. Sci. Stat.
    Comput. 5 (1984) 300; region of monotone tangents: Fritsch & Carlson, SIAM J. Numer. Anal. 17 (1980) 238).

    Outside the points the curve is straight: with the last secant above, and with the slope at the
    first point below.
    """

    def __init__(self, points):
        self.x, self.y = np.array(points, dtype=float).T
        self.m = PchipInterpolator(self.x, self.y).derivative()(self.x)
        self.last = (self.y[-1] - self.y[-2]) / (self.x[-1] - self.x[-2])

    def value_and_slope(self, x):
        i = np.clip(np.searchsorted(self.x, x, side="right") - 1, 0, len(self.x) - 2)
        h = self.x[i + 1] - self.x[i]
        t = (x - self.x[i]) / h
        y0, y1, a, b = self.y[i], self.y[i + 1], h * self.m[i], h * self.m[i + 1]
        c2, c3 = 3 * (y1 - y0) - 2 * a - b, 2 * (y0 - y1) + a + b
        value, slope = y0 + t * (a + t * (c2 + t * c3)), (a + t * (2 * c2 + t * 3 * c3)) / h
        for end, m, outside in ((0, self.m[0], x < self.x[0]), (-1, self.last, x > self.x[-1])):
            value = np.where(outside, self.y[end] + m * (x - self.x[end]), value)
            slope = np.where(outside, m, slope)
        return value, slope

    def inverse(self, y):
        """Newton within a shrinking bracket; the curve rises, so the root is single."""
        i = np.clip(np.searchsorted(self.y, y, side="right") - 1, 0, len(self.y) - 2)
        lo, hi = self.x[i], self.x[i + 1]
        lo = np.where(y < self.y[0], self.x[0] + (y - self.y[0]) / self.m[0] - 1, lo)
        hi = np.where(y > self.y[-1], self.x[-1] + (y - self.y[-1]) / self.last + 1, hi)
        x = (lo + hi) / 2
        for _ in range(60):
            f, slope = self.value_and_slope(x)
            lo, hi = np.where(f < y, x, lo), np.where(f > y, x, hi)
            step = x - (f - y) / slope
            new = np.where((step >= lo) & (step <= hi), step, (lo + hi) / 2)
            done = np.all(np.abs(new - x) <= 4e-16 * np.abs(new))
            x = new
            if done:
                break
        return x

    def __call__(self, co, acid):
        """A complex argument carries a derivative in its imaginary part: d c_a*/d c_o = 1/slope."""
        x = self.inverse(np.real(co))
        return x + 1j * np.imag(co) / self.value_and_slope(x)[1] if np.iscomplexobj(co) else x


# ---------------------------------------------------------------- one train

class Train:
    """Stage 1 takes the aqueous, stage `stages` takes the organic.

    A stage's states, in order: mixer aqueous, mixer w, mixer organic, then the parts of the aqueous
    layer, of its w and of the organic layer, then the mixer's organic volume.  Every array may
    have a last axis of independent columns.
    """

    def __init__(self, law, stages, parts, mixer, layer_a, layer_o, ka_v, qa, qo, release=0.0, fixed=False):
        self.law, self.stages, self.parts, self.v = law, stages, parts, mixer
        self.ka_v, self.release, self.fixed = ka_v, release, fixed
        self.vo0 = mixer * qo / (qa + qo)
        self.stage_o, self.stage_a = layer_o + self.vo0, layer_a + mixer - self.vo0
        self.block = 3 * parts + 4
        self.size = stages * self.block

    def area(self, vo):
        """Interfacial area over its design value, the aqueous dispersed (c is the organic's share).

        phi_d phi_c/(phi_c + 0.02) follows the dispersed share.  A `fixed` area divides by phi_d + 0.02
        too: level over the usual range, and gone with either phase.
        """
        g = lambda c: (1 - c) * c / (c + 0.02) / (1.02 - c if self.fixed else 1)
        return g(vo / self.v) / g(self.vo0 / self.v)

    def fill(self, ca, acid, co):
        """Every vessel of the train at the design volumes and at these concentrations."""
        n, va = self.parts, self.v - self.vo0
        w = acid + self.release * ca
        la, lo = (self.stage_a - va) / n, (self.stage_o - self.vo0) / n
        row = [ca * va, w * va, co * self.vo0] + [ca * la] * n + [w * la] * n + [co * lo] * n + [self.vo0]
        return np.tile(np.array(row, dtype=float), self.stages)

    def split(self, y):
        """Concentrations: dict of (stages, ...) arrays, layers as (stages, parts, ...)."""
        n = self.parts
        y = y.reshape((self.stages, self.block) + y.shape[1:])
        vo = y[:, -1]
        va = self.v - vo
        la, lo = (self.stage_a - va) / n, (self.stage_o - vo) / n
        ca, w, co = y[:, 0] / va, y[:, 1] / va, y[:, 2] / vo
        sa, sw, so = (y[:, 3 + k * n : 3 + (k + 1) * n] / v[:, None] for k, v in enumerate((la, la, lo)))
        return dict(y=y, vo=vo, va=va, ca=ca, w=w, co=co, acid=w - self.release * ca,
                    sa=sa, sw=sw, so=so, s_acid=sw - self.release * sa)

    def rates(self, c, qa, qo, ca_in, w_in, co_in):
        n, y, q = self.parts, c["y"], qa + qo
        before = lambda layer, x: np.concatenate((np.broadcast_to(x, layer[:1, -1].shape), layer[:-1, -1]))
        behind = lambda layer, x: np.concatenate((layer[1:, -1], np.broadcast_to(x, layer[:1, -1].shape)))
        transfer = self.ka_v * self.area(c["vo"]) * (c["ca"] - self.law(c["co"], c["acid"]))
        dy = np.zeros_like(y)
        dy[:, 0] = qa * before(c["sa"], ca_in) - y[:, 0] * q / self.v - transfer
        dy[:, 1] = qa * before(c["sw"], w_in) - y[:, 1] * q / self.v
        dy[:, 2] = qo * behind(c["so"], co_in) - y[:, 2] * q / self.v + transfer
        dy[:, -1] = qo - c["vo"] * q / self.v
        for k, (layer, volume, out) in enumerate(((c["sa"], c["va"], qa), (c["sw"], c["va"], qa), (c["so"], c["vo"], qo))):
            q_in = volume * q / self.v
            flux = [y[:, k] * q / self.v] + [(q_in + (out - q_in) * j / n) * layer[:, j - 1] for j in range(1, n + 1)]
            for j in range(n):
                dy[:, 3 + k * n + j] = flux[j] - flux[j + 1]
        return dy.reshape((self.size,) + dy.shape[2:])


# ---------------------------------------------------------------- integration

def jacobian(f, y):
    """Complex step (Squire & Trapp, SIAM Rev. 40 (1998) 110-112): exact to round-off, no difference."""
    h = 1e-40
    return f(y[:, None] + 1j * h * np.eye(len(y))).imag / h


def piece(profile, lo, hi):
    """The straight piece of a profile [(time, value), ...] on (lo, hi); two points at one time are a step."""
    mid = (lo + hi) / 2
    if mid <= profile[0][0] or mid >= profile[-1][0]:
        v = profile[0 if mid <= profile[0][0] else -1][1]
        return lambda t: v
    (ta, va), (tb, vb) = next((a, b) for a, b in zip(profile, profile[1:]) if a[0] < mid < b[0])
    return lambda t: va + (vb - va) * (t - ta) / (tb - ta)


def advance(plant, inputs, t0, t1, y0, rtol):
    """No corner of the inputs lies inside (t0, t1)."""
    u = {k: piece(p, t0, t1) for k, p in inputs.items()}
    f = lambda t, y: plant.rates(y, **{k: v(t) for k, v in u.items()})
    s = solve_ivp(f, (t0, t1), y0, method="Radau", rtol=rtol, atol=ATOL * rtol / RTOL,
                  jac=lambda t, y: jacobian(lambda z: f(t, z), y))
    if not s.success:
        raise RuntimeError(s.message)
    return s, f


class Run:
    """Every output time is the end of a step: values never come from the interpolant, whose order is lower."""

    def __init__(self, plant, y0, inputs, times_h, rtol=RTOL):
        self.plant, self.inputs, self.rtol = plant, inputs, rtol
        times = [t * HOUR for t in times_h]
        stops = sorted(set(times) | {0.0} | {t for p in inputs.values() for t, _ in p if 0 < t < times[-1]})
        self.steps, at, y = [], {0.0: y0}, y0
        for t0, t1 in zip(stops, stops[1:]):
            s, f = advance(plant, inputs, t0, t1, y, rtol)
            y = s.y[:, -1]
            at[t1] = y
            self.steps.append((s, f))
        self.states = [at[t] for t in times]

    def roots(self, g, among=lambda y: True):
        """Where g(y, dy/dt) changes sign, each from a fresh integration out of the step before it.

        `among` narrows the search: at rest a rate of change is round-off and its sign means nothing.
        """
        found = []
        for s, f in self.steps:
            values = [g(y, f(t, y)) for t, y in zip(s.t, s.y.T)]
            for i in range(len(values) - 1):
                if values[i] * values[i + 1] >= 0 or not among(s.y[:, i]):
                    continue
                u = {k: piece(p, s.t[0], s.t[-1]) for k, p in self.inputs.items()}
                flat = {k: [(s.t[0], v(s.t[0])), (s.t[-1], v(s.t[-1]))] for k, v in u.items()}

                def state(t):
                    return s.y[:, i] if t == s.t[i] else advance(self.plant, flat, s.t[i], t, s.y[:, i], self.rtol)[0].y[:, -1]

                t = brentq(lambda t: g(state(t), f(t, state(t))), s.t[i], s.t[i + 1], xtol=1e-5, rtol=1e-14)
                found.append((t, state(t)))
        return found

    def peak(self, of):
        """Largest value of one reading: where its rate of change turns, or at an end of a piece."""
        rate = lambda y, dy: of(y + 1j * 1e-40 * dy).imag / 1e-40
        ends = [(s.t[k], s.y[:, k]) for s, _ in self.steps for k in (0, -1)]
        top = max(of(y) for s, _ in self.steps for y in s.y.T)
        t, y = max(ends + self.roots(rate, lambda y: of(y) > 0.99 * top), key=lambda e: of(e[1]))
        return {"value": num(of(y)), "time_h": num(t / HOUR)}


def steady(plant, y, inputs):
    """Newton from a state near the root, which a long integration supplies."""
    held = {k: [(0.0, p[0][1])] for k, p in inputs.items()}
    y = Run(plant, y, held, [200.0], 1e-7).states[-1]
    f = lambda z: plant.rates(z, **{k: p[0][1] for k, p in held.items()})
    for _ in range(6):
        y = y - np.linalg.solve(jacobian(f, y), f(y))
    return y, f


# ---------------------------------------------------------------- writing

def num(x):
    return float(f"{x:.12g}")


def rows(values):
    return [[num(x) for x in row] for row in values]


def accuracy(build, floor=1e-9):
    """Largest relative change of any recorded value when the tolerances grow hundredfold: an upper mark of the error."""
    a, b = np.array(build(RTOL)), np.array(build(100 * RTOL))
    return float(f"{np.max(np.abs(a - b) / np.maximum(np.abs(a), floor)):.1g}")


def text(x, indent=""):
    """JSON with one key or one record a line, so that a change of values reads as such."""
    deeper = indent + " "
    if isinstance(x, dict):
        body = [f"{json.dumps(k)}: {text(v, deeper)}" for k, v in x.items()]
    elif isinstance(x, list) and x and isinstance(x[0], list) and len(x[0]) > 2:
        body = [json.dumps(row) for row in x]
    else:
        return json.dumps(x)
    a, b = "{}" if isinstance(x, dict) else "[]"
    return a + "\n" + ",\n".join(deeper + line for line in body) + "\n" + indent + b


def write(folder, name, data):
    (folder / name).write_text(text(data) + "\n")


TOOL = f"SciPy {scipy.__version__} solve_ivp Radau, rtol {RTOL:g}, atol {ATOL:g} kg, Jacobian by complex step"


# ---------------------------------------------------------------- ten stages

class Single:
    """One train between a feed and a fresh solvent, with fixed flows."""

    def __init__(self, train, qa, qo, solvent):
        self.train, self.qa, self.qo, self.solvent = train, qa, qo, solvent

    def rates(self, y, feed):
        return self.train.rates(self.train.split(y), self.qa, self.qo, feed, 0.0, self.solvent)

    def concentrations(self, y):
        """Stage after stage: mixer aqueous, mixer organic, aqueous parts, organic parts."""
        c = self.train.split(y)
        return np.hstack((c["ca"][:, None], c["co"][:, None], c["sa"], c["so"])).ravel()

    def columns(self):
        part = lambda k: f".part {k}" if self.train.parts > 1 else ""
        names = ["mixer.aqueous", "mixer.organic"]
        names += [f"settler.{p}{part(k + 1)}" for p in ("aqueous", "organic") for k in range(self.train.parts)]
        return [f"{j + 1}.{x}" for j in range(self.train.stages) for x in names]


def ten(folder):
    times = [0.5, 1, 2, 4, 6, 6.5, 7, 8, 10, 12, 18, 24]
    q, v, layer = 0.2, 36.0, 180.0
    plant = Single(Train(langmuir(12.0, 1.2), 10, 3, v, layer, layer, 0.15 * v, q, q, fixed=True), q, q, 1.0)
    feed = {"feed": [(0.0, 6.0), (6 * HOUR, 6.0), (6 * HOUR, 8.0), (24 * HOUR, 8.0)]}
    y0 = plant.train.fill(0.0, 0.0, 1.0)
    states = {r: Run(plant, y0, feed, times, r).states for r in (RTOL, 100 * RTOL)}
    records = lambda r: [plant.concentrations(y) for y in states[r]]
    low, f0 = steady(plant, y0, feed)
    high, _ = steady(plant, y0, {"feed": [(0.0, 8.0)]})
    write(folder, "ten.json", {
        "about": "Invented plant: ten counter-current stages, one solute, Langmuir isotherm, one step of the feed. "
                 "Concentrations in g/L; a record at the time of the step is what had been reached by then.",
        "made_by": TOOL,
        "largest_relative_change_at_100_times_the_tolerance": accuracy(records),
        "inputs": {
            "stages": 10, "tanks_in_series": 3, "mixer_m3": v, "aqueous_layer_m3": layer, "organic_layer_m3": layer,
            "law": "langmuir", "capacity_g_per_L": 12, "affinity_L_per_g": 1.2, "ka_per_s": 0.15, "ka_fixed": True,
            "feed_m3_per_s": q, "feed_g_per_L": [[0, 6], [6, 6], [6, 8], [24, 8]],
            "solvent_m3_per_s": q, "solvent_g_per_L": 1, "start_aqueous_g_per_L": 0, "start_organic_g_per_L": 1},
        "columns": plant.columns(),
        "times_h": times,
        "values": rows(records(RTOL)),
        "steady_at_6": [num(x) for x in plant.concentrations(low)],
        "steady_at_8": [num(x) for x in plant.concentrations(high)]})
    print("ten: extract at 24 h", records(RTOL)[-1][7])
    print("ten: steady raffinates", plant.concentrations(low)[76], plant.concentrations(high)[76])


# ---------------------------------------------------------------- closed circuit

class Circuit:
    """Extraction (aqueous: leach liquor) and strip around one organic tank at constant volume."""

    def __init__(self, qa, qo, strip_q, strip_cu, strip_acid, leach_acid, fixed=False):
        self.qa, self.strip_q, self.leach_acid, self.release, self.tank = qa, strip_q, leach_acid, 1.543, 182.0
        self.w_strip, self.strip_cu, self.strip_acid = strip_acid + self.release * strip_cu, strip_cu, strip_acid
        law, e = exchange(16.0, 10.5, 1.0, 2, 2), 0.94 / 0.06
        self.extraction = Train(law, 3, 3, 42.0, 180 * 0.35, 180 * 0.30, e * qa, qa, qo, self.release, fixed)
        self.strip = Train(law, 1, 3, 20.0, 125 * 0.35, 125 * 0.30, e * strip_q, strip_q, qo, self.release, fixed)

    def barren(self):
        return np.concatenate((self.extraction.fill(0.0, self.leach_acid, 0.0),
                               self.strip.fill(self.strip_cu, self.strip_acid, 0.0), [0.0]))

    def parts(self, y):
        k = self.extraction.size
        return self.extraction.split(y[:k]), self.strip.split(y[k:-1]), y[-1] / self.tank

    def rates(self, y, copper, organic):
        e, s, tank = self.parts(y)
        de = self.extraction.rates(e, self.qa, organic, copper, self.leach_acid + self.release * copper, tank)
        ds = self.strip.rates(s, self.strip_q, organic, self.strip_cu, self.w_strip, e["so"][0, -1])
        return np.concatenate((de, ds, (organic * (s["so"][0, -1] - tank))[None]))

    def raffinate(self, y):
        return self.parts(y)[0]["sa"][-1, -1]

    def columns(self):
        per = ["mixer.aqueous.copper", "mixer.aqueous.acid", "mixer.organic.copper", "settler.aqueous.copper",
               "settler.aqueous.acid", "settler.organic.copper", "mixer.organic.volume [m3]"]
        return [f"{t}.{j}.{x}" for t, n in (("extraction", 3), ("strip", 1)) for j in range(1, n + 1) for x in per] \
            + ["tank.organic.copper"]

    def record(self, y):
        e, s, tank = self.parts(y)
        out = []
        for c in (e, s):
            for j in range(len(c["ca"])):
                out += [c["ca"][j], c["acid"][j], c["co"][j], c["sa"][j, -1], c["s_acid"][j, -1], c["so"][j, -1], c["vo"][j]]
        return np.array(out + [tank])


def closed_circuit(folder):
    h = 1 / HOUR
    design = (420 * h, 430 * h, 135 * h, 35.0, 185.0, 1.8)
    plant, level = Circuit(*design), Circuit(*design, fixed=True)
    base = {"copper": [(0.0, 5.2)], "organic": [(0.0, 430 * h)]}
    ramp = [(t * HOUR, 5.2 * x) for t, x in ((0, 1), (1, 1), (1.5, 1.35), (5, 1.35), (5.5, 1), (10, 1))]
    jump = [(0.0, 430 * h), (HOUR * 5 / 3, 430 * h), (HOUR * 5 / 3, 494.5 * h), (10 * HOUR, 494.5 * h)]
    start_times = [0.5, 1, 2, 3, 4, 6, 8, 12]
    upset_times = [1, 1.5, 2, 3, 4, 5, 5.25, 5.5, 6, 8, 10]
    y0 = plant.barren()
    ys, f = steady(plant, y0, base)
    modes = np.sort(-1 / np.linalg.eigvals(jacobian(f, ys)).real)[::-1] / HOUR

    def case(about, y, inputs, times, plant=plant):
        run, coarse = Run(plant, y, inputs, times), Run(plant, y, inputs, times, 100 * RTOL)
        both = {RTOL: run, 100 * RTOL: coarse}
        return run, {
            "about": about, "times_h": times,
            "largest_relative_change_at_100_times_the_tolerance":
                accuracy(lambda r: [plant.record(z) for z in both[r].states]),
            "values": rows(plant.record(z) for z in run.states)}

    upset = {"copper": ramp, "organic": base["organic"]}
    answered = {"copper": ramp, "organic": jump}
    r1, b1 = case("Start-up from barren, no change of inputs.", y0, base, start_times)
    r2, b2 = case("From steady: leach liquor copper +35 %, in over 1 to 1.5 h, out over 5 to 5.5 h.", ys, upset, upset_times)
    r3, b3 = case("The same upset, and the organic pump +15 % at once at 1 h 40 min until the end.", ys, answered, upset_times)
    r4, b4 = case("The answered upset with `fixed` area.", ys, answered, upset_times, level)
    end = plant.raffinate(ys)
    reach = {}
    for share in (0.95, 0.99):
        reach[f"{share:g}"] = [num(t / HOUR) for t, _ in r1.roots(lambda y, dy: plant.raffinate(y) - share * end)]
    b1["hours_at_which_raffinate_copper_crosses_share_of_steady"] = reach
    for run, out in ((r2, b2), (r3, b3), (r4, b4)):
        out["raffinate_copper_peak"] = run.peak(plant.raffinate)
        out["hours_at_which_raffinate_copper_crosses_0.6"] = \
            [num(t / HOUR) for t, _ in run.roots(lambda y, dy: plant.raffinate(y) - 0.6)]
    write(folder, "closed-circuit.json", {
        "about": "Invented plant: copper-like exchange, three extraction stages and one strip stage around one organic loop "
                 "with a tank at constant volume. Concentrations in g/L. Settler columns are the last part, i.e. what leaves. "
                 "A record at the time of a step is what had been reached by then.",
        "made_by": TOOL,
        "inputs": {
            "leach_liquor_m3_per_h": 420, "leach_copper_g_per_L": 5.2, "leach_acid_g_per_L": 1.8,
            "organic_m3_per_h": 430, "tank_m3": 182,
            "strip_liquor_m3_per_h": 135, "strip_copper_g_per_L": 35, "strip_acid_g_per_L": 185,
            "extraction_stages": 3, "extraction_mixer_m3": 42, "extraction_settler_m2": 180,
            "strip_stages": 1, "strip_mixer_m3": 20, "strip_settler_m2": 125,
            "aqueous_depth_m": 0.35, "organic_depth_m": 0.30, "tanks_in_series": 3,
            "law": "exchange", "constant": 16, "extractant_g_per_L": 10.5, "per_solute": 1, "p": 2, "q": 2,
            "releases_acid_g_per_g": 1.543, "stage_efficiency": 0.94, "efficiency_side": "aqueous, both trains",
            "area": "g = phi_d phi_c/(phi_c + 0.02) over its design value, organic continuous in both trains; "
                    "fixed: g = phi_d phi_c/((phi_d + 0.02)(phi_c + 0.02))",
            "barren": "extraction aqueous 0 copper, 1.8 acid; strip aqueous as entering; all organic 0"},
        "columns": plant.columns(),
        "steady": {"values": rows([plant.record(ys)]), "slowest_modes_h": [num(x) for x in modes[:3]]},
        "startup": b1, "upset": b2, "answered": b3, "answered_fixed_area": b4})
    show = dict(zip(plant.columns(), plant.record(ys)))
    for k, v in show.items():
        print(f"circuit: steady {k} {v:.6g}")
    print("circuit: modes h", modes[:3])
    print("circuit: reach", reach)
    for out in (b2, b3, b4):
        print("circuit:", out["raffinate_copper_peak"], out["hours_at_which_raffinate_copper_crosses_0.6"])


# ---------------------------------------------------------------- carboxylic acid by table

POINTS = [[0, 0], [2, 4.6], [5, 10.6], [10, 18.5], [20, 29.5], [40, 42], [80, 54]]


def carboxylic(qo_m3_per_h, solvent=0.4, mixer_min=3.0):
    qa, qo = 30 / HOUR, qo_m3_per_h / HOUR
    train = Train(Table(POINTS), 6, 1, mixer_min * 60 * (qa + qo), 900 * qa, 900 * qo, 9 * qa, qa, qo)
    return Single(train, qa, qo, solvent)


def carboxylic_table(folder):
    feed, times = {"feed": [(0.0, 40.0)]}, [1, 2, 4, 8, 16, 24]
    table = Table(POINTS)
    ca = np.array([-0.5, 0.25, 1, 1.5, 3, 4, 7, 9, 12, 15, 25, 30, 50, 60, 79, 90])
    co, slope = table.value_and_slope(ca)
    steadies = {}
    for q in (40, 36, 32):
        plant = carboxylic(q)
        y0 = plant.train.fill(0.0, 0.0, 0.4)
        y, _ = steady(plant, y0, feed)
        run = Run(plant, y0, feed, [60.0])
        raffinate = lambda z: plant.concentrations(z)[-2]
        near = max(t for t, _ in run.roots(lambda z, dz: abs(raffinate(z) / raffinate(y) - 1) - 0.01))
        steadies[str(q)] = {"values": rows([plant.concentrations(y)]), "raffinate_g_per_L": num(raffinate(y)),
                            "extract_g_per_L": num(plant.concentrations(y)[3]), "raffinate_within_1_percent_after_h": num(near / HOUR)}
        print("carboxylic:", q, {k: v for k, v in steadies[str(q)].items() if k != "values"})
    plant = carboxylic(36)
    y0 = plant.train.fill(0.0, 0.0, 0.4)
    states = {r: Run(plant, y0, feed, times, r).states for r in (RTOL, 100 * RTOL)}
    records = lambda r: [plant.concentrations(y) for y in states[r]]
    write(folder, "carboxylic-table.json", {
        "about": "Invented plant: six counter-current stages on a measured isotherm, c_o(c_a) through a monotone cubic of "
                 "Fritsch & Carlson, c_a* its inverse, straight outside the points. Concentrations in g/L.",
        "made_by": TOOL,
        "inputs": {
            "stages": 6, "tanks_in_series": 1, "feed_m3_per_h": 30, "feed_g_per_L": 40, "solvent_g_per_L": 0.4,
            "stage_efficiency": 0.90, "efficiency_side": "aqueous", "mixer_minutes_of_both_flows": 3,
            "layer_minutes_of_own_flow": 15, "start_aqueous_g_per_L": 0, "start_organic_g_per_L": 0.4},
        "isotherm": {"points": POINTS, "tangents": [num(x) for x in table.m], "aqueous_g_per_L": [num(x) for x in ca],
                     "organic_g_per_L": [num(x) for x in co], "slope": [num(x) for x in slope]},
        "columns": plant.columns(),
        "steady_by_solvent_m3_per_h": steadies,
        "startup": {"about": "From barren, solvent 36 m3/h.", "solvent_m3_per_h": 36, "times_h": times,
                    "largest_relative_change_at_100_times_the_tolerance": accuracy(records),
                    "values": rows(records(RTOL))}})


if __name__ == "__main__":
    where = Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parent
    for make in (ten, closed_circuit, carboxylic_table):
        make(where)
