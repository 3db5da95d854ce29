"""An engine with pressure traces that are formulas of angle, on a train of a few masses, computed from the
plain numbers of its study: dense matrices instead of tree elimination, quadrature instead of tables, sums
over the repeat, eigh for the modes. Knows nothing of the program but the keys of a study.
"""
import math
import os

import numpy as np
from scipy.integrate import simpson
from scipy.interpolate import CubicSpline
from scipy.linalg import eigh

BORE, STROKE, ROD, MASS = 0.090, 0.095, 0.150, 0.62
ORDER = [1, 3, 4, 2]  # cylinders in firing sequence, even intervals
N = len(ORDER)
CRANKCASE = 100.0  # kPa
EXHAUST = 105.0
FRICTION = (60e3, 11e3, 3e3)  # Pa, per krpm, per krpm2
CYLINDER_SIGMA, CYCLIC_SIGMA = 0.03, 0.02
HIGHEST_ORDER = 30
RESERVE_DB = 3
GUARD = {"cab": 0.05, "mount": 0.05, "driveline": 0.03, "crank": 0.02}
LOADS = [20, 60, 110, 160]  # kPa: columns of the trace; pressure is linear between
ANGLES = range(-360, 361)

# (name, inertia, damping to ground, on)
NODES = [("pulley", 0.030, 0.05, 1), ("throw1", 0.020, 0.3, 1), ("throw2", 0.020, 0.3, 1),
         ("throw3", 0.020, 0.3, 1), ("throw4", 0.020, 0.3, 1), ("flywheel", 0.45, 0, 1),
         ("gearbox", 0.03, 0.02, 1), ("drum", 2.0, 0.5, 0)]
# name, from, to, stiffness, (kind, value) of damping, gear ratio, outer mm
LINKS = [("nose", 0, 1, 9e4, ("damping_nms_per_rad", 6.0), 1, None),
         ("crank1", 1, 2, 4.0e5, ("damping_ratio", 0.01), 1, 50),
         ("crank2", 2, 3, 4.0e5, ("damping_ratio", 0.01), 1, 50),
         ("crank3", 3, 4, 4.0e5, ("damping_ratio", 0.01), 1, 50),
         ("tail", 4, 5, 6.0e5, ("damping_ratio", 0.01), 1, 60),
         ("coupling", 5, 6, 1500.0, ("loss_factor", 0.15), 1, None),
         ("shaft", 6, 7, 3000.0, ("loss_factor", 0.08), 2.7, None)]
BANDS = [("coupling", "driveline", 15, 40, "link-torque:coupling", {"limit_rms": 11}),
         ("shaft", "driveline", 3, 12, "link-torque:shaft", {"limit_rms": 10}),
         ("frame", "mount", 9, 20, "roll-torque", {"over_all_fire_db": 23, "floor_rms": 6}),
         ("boom", "cab", 40, 70, "roll-torque", {"over_all_fire_db": 3, "floor_rms": 90,
                                                 "limit_rms": 112})]
LIMITS = [("stress", "link-stress:crank3", "half_range", 80), ("irregular", "irregularity", "pp", 0.08),
          ("nose heat", "damper-heat:nose", "mean", 90),
          ("coupling heat", "damper-heat:coupling", "mean", 20),
          ("pulley", "node-angle:pulley", "half_range", 0.05),
          ("box", "node-acceleration:gearbox", "max", 1800), ("drum", "node-speed:drum", "mean", 150),
          ("torque", "link-torque:tail", "max", 1500), ("roll", "roll-torque", "rms", 400),
          ("peak", "peak-pressure", "max", 9)]
SPEEDS = list(range(1100, 2601, 250))
DEMAND = ([1100, 2600], [55.0, 42.0])
DENSITIES = ["2/5", "1/2", "2/3", "1"]


# ---- the study ----------------------------------------------------------------------------------
def fired_kpa(deg, load, after):
    """Pressure of a fired cycle: affine in load; after a skip it burns 6 % more."""
    charge = 6.0 * np.exp(-(deg / 40.0) ** 2)
    burn = (1.06 if after else 1.0) * 26.0 * np.exp(-((deg - 22.0) / 28.0) ** 2)
    open_ = np.exp(-((deg + 270.0) / 26.0) ** 2)
    return EXHAUST * (1 - open_) + load * (open_ + charge + burn)


def skipped_kpa(deg, run):
    return EXHAUST + (90.0 if run == 1 else 70.0) * np.exp(-(deg / 60.0) ** 2)


def fuel_mg(load, after):
    return 0.31 * load + (0.6 if after else 0.2)


def write_study(folder, name, viscous):
    heads = [(load, after) for load in LOADS for after in (0, 1)]
    with open(os.path.join(folder, "fired.csv"), "w") as f:
        f.write("angle_deg" + "".join(
            f",pressure_kpa:manifold_kpa={load}:after={after}:fuel_mg={fuel_mg(load, after)!r}"
            for load, after in heads) + "\n")
        for deg in ANGLES:
            f.write(f"{deg}" + "".join(f",{fired_kpa(deg, load, after)!r}" for load, after in heads)
                    + "\n")
    with open(os.path.join(folder, "skipped.csv"), "w") as f:
        f.write("angle_deg,pressure_kpa:run=1,pressure_kpa:run=2\n")
        for deg in ANGLES:
            f.write(f"{deg},{skipped_kpa(deg, 1)!r},{skipped_kpa(deg, 2)!r}\n")
    text = [f"""title: An engine by formula
engine:
  bore_mm: {BORE * 1e3!r}
  stroke_mm: {STROKE * 1e3!r}
  rod_length_mm: {ROD * 1e3!r}
  reciprocating_mass_kg: {MASS!r}
  firing_order: {ORDER}
  friction_kpa: {{constant: {FRICTION[0] / 1e3!r}, per_krpm: {FRICTION[1] / 1e3!r}, per_krpm2: {FRICTION[2] / 1e3!r}, per_mpa_peak: 0}}
  dispersion: {{cylinder_percent: {CYLINDER_SIGMA * 100!r}, cyclic_percent: {CYCLIC_SIGMA * 100!r}}}
cycle:
  kind: traces
  traces: {{fired: fired.csv, skipped: skipped.csv}}
  manifold_kpa: {{lowest: 20, highest: {LOADS[-1]}}}
  exhaust_kpa: {EXHAUST!r}
  crankcase_kpa: {CRANKCASE!r}
train:
  flywheel: flywheel
  load: drum
  nodes:"""]
    for node, inertia, damping, housed in NODES:
        text.append(f"    - {{name: {node}, inertia_kgm2: {inertia!r}, damping_nms_per_rad: {damping!r}, "
                    f"on: {'powertrain' if housed else 'outside'}}}")
    text.append("  links:")
    for link, a, b, k, (kind, value), ratio, outer in LINKS:
        if viscous and kind == "loss_factor":
            kind, value = "damping_ratio", value / 2
        text.append(f"    - {{name: {link}, from: {NODES[a][0]}, to: {NODES[b][0]}, "
                    f"stiffness_nm_per_rad: {k!r}, {kind}: {value!r}, gear_ratio: {ratio!r}"
                    + (", loss_law: constant" if kind == "loss_factor" else "")
                    + (f", outer_mm: {outer}, inner_mm: 10, stress_concentration: 1.7" if outer else "")
                    + "}")
    text.append("bands:")
    for band, kind, low, high, quantity, limits in BANDS:
        text.append(f"  - {{name: {band}, kind: {kind}, low_hz: {low}, high_hz: {high}, "
                    f"quantity: \"{quantity}\", "
                    + ", ".join(f"{key}: {value}" for key, value in limits.items()) + "}")
    text.append("limits:")
    for limit, quantity, statistic, value in LIMITS:
        text.append(f"  - {{name: {limit}, quantity: \"{quantity}\", statistic: {statistic}, "
                    f"value: {value}}}")
    text.append(f"""screen:
  speeds_rpm: {SPEEDS}
  brake_torque_nm: [[{DEMAND[0][0]}, {DEMAND[1][0]}], [{DEMAND[0][1]}, {DEMAND[1][1]}]]
  densities: [{', '.join(DENSITIES)}]
  highest_order: {HIGHEST_ORDER}
  reserve_db: {RESERVE_DB}
  referee: 0
""")
    path = os.path.join(folder, name)
    with open(path, "w") as f:
        f.write("\n".join(text))
    return path


# ---- the engine ---------------------------------------------------------------------------------
R_CRANK = STROKE / 2
AREA = math.pi * BORE ** 2 / 4


def slider(a):
    """x, x', x'' of crank angle from top; x is r + l less the pin's height."""
    s, c = np.sin(a), np.cos(a)
    q = np.sqrt(ROD ** 2 - (R_CRANK * s) ** 2)
    x = R_CRANK * (1 - c) + ROD - q
    dx = R_CRANK * s + R_CRANK ** 2 * s * c / q
    ddx = R_CRANK * c + R_CRANK ** 2 * (c * c - s * s) / q + R_CRANK ** 4 * (s * c) ** 2 / q ** 3
    return x, dx, ddx


# The content of a pulse of 4 pi rad is smooth over orders of 1/2: a spline over 1/48 is good to 1e-6.
PULSE_ORDERS = np.arange(0, 6, 1 / 48)
WINDOW = np.arange(-2 * math.pi, 2 * math.pi, math.pi / 360)
KERNEL = np.exp(-1j * np.outer(PULSE_ORDERS, WINDOW)) * (math.pi / 360)


class Roll:
    """What each cylinder does in each of its cycles of the repeat."""

    def __init__(self, word):
        fires = [letter == "x" for letter in word]
        n = math.lcm(len(fires), N)
        self.cycles, self.revolutions = n // N, 2 * n // N
        self.fire = [[fires[(c * N + s) % len(fires)] for c in range(self.cycles)] for s in range(N)]
        self.fires = sum(map(sum, self.fire))

    def skips_before(self, s, c):
        for back in range(1, self.cycles + 1):
            if self.fire[s][(c - back) % self.cycles]:
                return back - 1
        return 99

    def pressure(self, s, angle, load):
        """kPa of a slot at crank angles from the start of the repeat, which is slot 0's firing top."""
        cycle = 4 * math.pi
        own = angle - s * cycle / N
        c = np.floor((own + cycle / 2) / cycle).astype(int)
        deg = np.degrees(own - c * cycle)
        out = np.empty_like(angle)
        for k in range(self.cycles):
            here = c % self.cycles == k
            skips = self.skips_before(s, k)
            out[here] = (fired_kpa(deg[here], load, skips > 0) if self.fire[s][k] else
                         skipped_kpa(deg[here], skips + 1))
        return out

    def gas_torque(self, s, angle, load):
        dx = slider(angle - s * 4 * math.pi / N)[1]
        return (self.pressure(s, angle, load) - CRANKCASE) * 1e3 * AREA * dx

    def mean_gas(self, load):
        a = np.arange(0, 2 * math.pi * self.revolutions, math.pi / 720)
        return sum(np.mean(self.gas_torque(s, a, load)) for s in range(N))

    def fired_pulse(self, q, load):
        """Integral of a fired window's torque times exp(-i q a), mean over the fires."""
        mean = np.zeros_like(WINDOW)
        for s in range(N):
            for c in range(self.cycles):
                if self.fire[s][c]:
                    mean += fired_kpa(np.degrees(WINDOW), load, self.skips_before(s, c) > 0) - CRANKCASE
        pulse = KERNEL @ (mean / self.fires * 1e3 * AREA * slider(WINDOW)[1])
        return CubicSpline(PULSE_ORDERS, pulse)(q)


def friction_nm(rpm):
    k = rpm / 1000
    fmep = FRICTION[0] + FRICTION[1] * k + FRICTION[2] * k * k
    return fmep * N * AREA * STROKE / (4 * math.pi)


# ---- the train ----------------------------------------------------------------------------------
class Train:
    def __init__(self, viscous):
        a = np.linspace(0, 2 * math.pi, 3600, endpoint=False)
        self.between_lines = {}  # of each band's quantity, once
        self.mean_recip = MASS * np.mean(slider(a)[1] ** 2)
        self.throw = [1 + number - 1 for number in ORDER]  # node of a slot
        n = len(NODES)
        self.J0 = np.array([node[1] for node in NODES])
        self.J = self.J0.copy()
        self.J[1:1 + N] += self.mean_recip
        self.C = np.array([node[2] for node in NODES])
        self.ratio = np.ones(n)
        self.row = np.zeros((len(LINKS), n))  # twist on the `to` side
        for i, (_, a, b, k, _, ratio, _) in enumerate(LINKS):
            self.ratio[b] = self.ratio[a] / ratio
            self.row[i, a], self.row[i, b] = 1 / ratio, -1
        self.k = np.array([link[3] for link in LINKS])
        square, shape = eigh(self.row.T @ np.diag(self.k) @ self.row, np.diag(self.J))
        self.hz = np.sqrt(np.maximum(square, 0)) / (2 * math.pi)
        self.shape = shape
        self.c, self.eta = np.zeros(len(LINKS)), np.zeros(len(LINKS))
        for i, link in enumerate(LINKS):
            kind, value = link[4]
            if kind == "damping_nms_per_rad":
                self.c[i] = value
            elif kind == "loss_factor" and not viscous:
                self.eta[i] = value
            else:
                if kind == "loss_factor":
                    value /= 2
                energy = self.k[i] * (self.row[i] @ shape[:, 1:]) ** 2 / square[1:]
                main = 1 + int(np.argmax(energy))
                self.c[i] = 2 * value * self.k[i] / (2 * math.pi * self.hz[main])

    def impedance(self, w):
        """Complex stiffness of every link at w: [frequency, link]."""
        return self.k * (1 + 1j * self.eta) + 1j * np.outer(w, self.c)

    def solve(self, w, force):
        """Angles at w[f] of torques force[f, node] or [f, node, case]."""
        K = self.impedance(w)
        A = np.einsum("li,fl,lj->fij", self.row, K, self.row).astype(complex)
        at = np.arange(len(NODES))
        A[:, at, at] += -np.outer(w ** 2, self.J) + 1j * np.outer(w, self.C)
        if force.ndim == 2:
            return np.linalg.solve(A, force[:, :, None])[:, :, 0]
        return np.linalg.solve(A, force)

    def static(self, mean):
        """Mean link torques and angles against the flywheel of mean torques on the nodes."""
        load = 7
        balanced = mean.copy()
        balanced[load] -= mean @ self.ratio / self.ratio[load]
        y = np.linalg.lstsq(self.row.T @ np.diag(self.k) @ self.row, balanced, rcond=None)[0]
        y = y - y[5] * self.ratio
        return self.k * (self.row @ y), y


# ---- one condition ------------------------------------------------------------------------------
def value_at(z, mean, n):
    """n samples of mean + sum Re z[h] exp(i h ..), lines 1.. in z[0..]."""
    full = np.zeros(n // 2 + 1, complex)
    full[0] = mean * n
    full[1:len(z) + 1] = z * (n / 2)
    return np.fft.irfft(full, n)


def lines_of(x, n_lines):
    f = np.fft.rfft(x) / len(x)
    return f[0].real, 2 * f[1:n_lines + 1]


class Condition:
    def __init__(self, train, word, rpm, demand, level):
        self.train, self.rpm = train, rpm
        self.roll = Roll(word)
        self.W = rpm * math.pi / 30
        self.R = self.roll.revolutions
        self.n_lines = HIGHEST_ORDER * self.R
        self.w = self.W / self.R * np.arange(1, self.n_lines + 1)
        self.friction = friction_nm(rpm)
        low, high = self.roll.mean_gas(0.0), self.roll.mean_gas(100.0)
        self.load = (demand + self.friction - low) / (high - low) * 100
        self.reached = LOADS[0] <= self.load <= LOADS[-1]
        if self.reached:
            self.move(level)

    def fuel(self):
        mg = sum(fuel_mg(self.load, self.roll.skips_before(s, c) > 0) for s in range(N)
                 for c in range(self.roll.cycles) if self.roll.fire[s][c])
        return mg * 1e-6 * self.rpm / 60 / self.R * 3600

    def peak_mpa(self):
        deg = np.linspace(-30, 60, 90001)
        after = [self.roll.skips_before(s, c) > 0 for s in range(N) for c in range(self.roll.cycles)
                 if self.roll.fire[s][c]]
        return np.max(fired_kpa(deg, self.load, any(after))) / 1e3

    def move(self, level):
        t, n = self.train, 1 << math.ceil(math.log2(12 * self.n_lines))
        even = 2 * math.pi * self.R * np.arange(n) / n
        node = [t.throw[s] for s in range(N)]
        d = v = acc = np.zeros((N, n))  # of each slot's throw
        for turn in range(80):
            mean, force = np.zeros(len(NODES)), np.zeros((self.n_lines, len(NODES)), complex)
            for s in range(N):
                a = even + d[s]
                _, dx, ddx = slider(a - s * 4 * math.pi / N)
                F = self.roll.gas_torque(s, a, self.load) - self.friction / N
                F -= MASS * dx * ddx * (self.W + v[s]) ** 2
                F -= (MASS * dx ** 2 - t.mean_recip) * acc[s]
                mean[node[s]], force[:, node[s]] = lines_of(F, self.n_lines)
            angle = t.solve(self.w, force)
            self.link_mean, still = t.static(mean)
            if level == "constant":
                break
            step = [value_at(angle[:, node[s]], still[node[s]], n) for s in range(N)]
            change = np.max(np.abs(np.array(step) - d))
            d = np.array(step)
            iw = 1j * self.w
            v = np.array([value_at(iw * angle[:, node[s]], 0, n) for s in range(N)])
            acc = np.array([value_at(iw ** 2 * angle[:, node[s]], 0, n) for s in range(N)])
            if change < 1e-10:
                break
        assert level == "constant" or change < 1e-10, "the iteration here does not settle"
        self.angle, self.mean = angle, mean

    def quantity(self, name, w=None, angle=None):
        """Mean and lines; without w and angle of this condition's motion."""
        t = self.train
        what, _, target = name.partition(":")
        own = w is None
        if own:
            w, angle = self.w, self.angle
        iw = 1j * w if angle.ndim == 2 else 1j * w[:, None]
        node = [i for i, x in enumerate(NODES) if x[0] == target]
        link = [i for i, x in enumerate(LINKS) if x[0] == target]
        torque = np.einsum("fl,ln,fn...->fl...", t.impedance(w), t.row, angle)
        if what.startswith("link-"):
            mean = self.link_mean[link[0]] if own else 0
            scale = 1.0
            if what == "link-stress":
                outer, inner = LINKS[link[0]][6] / 1e3, 0.010
                scale = 1.7 / (math.pi * (outer ** 4 - inner ** 4) / (16 * outer)) / 1e6
            return mean * scale, torque[:, link[0]] * scale
        if what == "node-angle":
            return 0, angle[:, node[0]]
        if what == "node-speed":
            return self.W * t.ratio[node[0]], iw * angle[:, node[0]]
        if what == "node-acceleration":
            return 0, iw ** 2 * angle[:, node[0]]
        if what == "irregularity":
            return 1, iw * angle[:, 5] / self.W
        assert what == "roll-torque"
        # what the housed nodes' momentum loses, less what leaves in the shaft to the drum
        housed = np.array([x[3] for x in NODES])
        out = -np.einsum("n,fn...->f...", housed * t.J0, iw[..., None] ** 2 * angle
                         if angle.ndim == 2 else iw[:, :, None] ** 2 * angle)
        ratio = LINKS[6][5]
        return (-self.link_mean[6] / ratio if own else 0), out - torque[:, 6] / ratio

    def heat(self, name):
        i = [k for k, link in enumerate(LINKS) if link[0] == name][0]
        twist = self.angle @ self.train.row[i]
        return np.sum(0.5 * self.w * self.train.impedance(self.w)[:, i].imag * np.abs(twist) ** 2)

    def extremes(self, name):
        mean, z = self.quantity(name)
        x = value_at(z, mean, 1 << 17)
        return np.max(x), np.min(x), mean, z

    def limit(self, quantity, statistic):
        if quantity.startswith("damper-heat"):
            return self.heat(quantity.partition(":")[2])
        if quantity == "peak-pressure":
            return self.peak_mpa()
        high, low, mean, z = self.extremes(quantity)
        return {"pp": high - low, "half_range": (high - low) / 2, "max": max(high, -low),
                "mean": abs(mean), "rms": math.sqrt(np.sum(np.abs(z) ** 2) / 2)}[statistic]

    def unit(self, w):
        """Angles of unit torque on each slot's throw: [frequency, node, slot]."""
        force = np.zeros((len(w), len(NODES), N), complex)
        for s in range(N):
            force[:, self.train.throw[s], s] = 1
        return self.train.solve(w, force)

    def level(self, band):
        """nominal, dispersed, leading order, its amplitude, share of cyclic variation in the square."""
        _, kind, low, high, quantity, _ = band
        low, high = low * (1 - GUARD[kind]), high * (1 + GUARD[kind])
        hz = self.w / (2 * math.pi)
        inside = (hz >= low) & (hz <= high)
        own = np.abs(self.quantity(quantity)[1][inside]) ** 2
        # a cylinder that is stronger is so in each of its cycles
        w = self.w[inside]
        added = np.zeros(len(w))
        if len(w):
            q = w / self.W
            H = self.quantity(quantity, w, self.unit(w))[1]
            P = self.roll.fired_pulse(q, self.load)
            for s in range(N):
                phase = sum(np.exp(-1j * q * 4 * math.pi * (s / N + c)) for c in range(self.roll.cycles)
                            if self.roll.fire[s][c])
                added += np.abs(CYLINDER_SIGMA * H[:, s] * P * phase / (math.pi * self.R)) ** 2
        # one cycle's strength after another at random: Campbell's theorem
        f = np.linspace(low, high, 801)
        w = 2 * math.pi * f
        H = self.train.between_lines.get(quantity + kind)
        if H is None:
            H = self.train.between_lines[quantity + kind] = self.quantity(quantity, w, self.unit(w))[1]
        P = self.roll.fired_pulse(w / self.W, self.load) / self.W
        rate = [sum(self.roll.fire[s]) * self.rpm / 60 / self.R for s in range(N)]
        density = sum(2 * rate[s] * CYCLIC_SIGMA ** 2 * np.abs(H[:, s] * P) ** 2 for s in range(N))
        cyclic = simpson(density, x=f)
        nominal = math.sqrt(np.sum(own) / 2)
        dispersed = math.sqrt(np.sum(own + added) / 2 + cyclic)
        at = int(np.argmax(own + added)) if len(own) else None
        leading = (np.nonzero(inside)[0][at] + 1) / self.R if len(own) else None
        peak = math.sqrt((own + added)[at]) if len(own) else None
        return nominal, dispersed, leading, peak, cyclic / dispersed ** 2
