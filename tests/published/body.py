#!/usr/bin/env python3
"""The powertrain on its mounts against numpy and scipy: `modes` and `point` as JSON.

usage: body.py TACET   (writes its studies into a folder of its own)

From the plain numbers of a V six with pin offset, counterweights and a balance shaft, on three mounts of
which one is turned and two change with frequency, with paths by resonances and by a table. Shaking comes
from the positions of the moving masses in time, modes from roots of the characteristic equation, weightings
from their pole-zero form. Of the program's numbers only the lines of the roll torque are taken over.
"""
import json
import math
import os
import subprocess
import sys
import tempfile

sys.dont_write_bytecode = True  # no cache beside the sources

import numpy as np
from scipy import signal
from scipy.linalg import eigh
from scipy.optimize import brentq

TACET = sys.argv[1]
STROKE, ROD, OFFSET, PISTON, ROTATING = 0.086, 0.148, 0.0008, 0.58, 0.46
ORDER = [1, 4, 2, 5, 3, 6]
BANK = {1: -30, 2: -30, 3: -30, 4: 30, 5: 30, 6: 30}  # deg
ALONG = {1: 0.000, 2: 0.108, 3: 0.216, 4: 0.024, 5: 0.132, 6: 0.240}  # m
AXIS = np.array([-0.190, 0.014, -0.075])
MASS = 236.0
INERTIA = np.array([[11.5, 0.35, -1.05], [0.35, 19.0, 0.25], [-1.05, 0.25, 17.5]])
WEIGHTS = [(-0.060, 0.0145, 176.0), (0.310, 0.0132, 61.0)]  # m along, kg m, deg
SHAFTS = [((0.030, 0.110, -0.050), -1.0, 0.0061, 75.0), ((-0.050, -0.090, 0.030), 2.0, 0.0017, 200.0)]
# at, turned deg, dynamic N/m, static N/m, loss
MOUNTS = [("left", (-0.200, -0.310, -0.045), (25, -12, 40), (118e3, 82e3, [(2, 190e3), (60, 320e3)]),
           (None, None, 165e3), [(0, 0.06), (100, 0.24)]),
          ("right", (-0.185, 0.300, -0.070), None, (105e3, [(5, 77e3), (40, 111e3), (200, 130e3)], 225e3),
           (None, None, None), 0.11),
          ("rear", (0.540, 0.015, -0.120), None, (99e3, 88e3, 196e3), (90e3, 80e3, 150e3), 0.01)]
PLACES = [("sump", (0.11, -0.05, -0.27)), ("nose", (-0.33, 0.02, 0.10))]
POINTS = [("seat", "acceleration", "wk"), ("back", "acceleration", "wd"), ("ear", "pressure", "a")]
TABLE = [(3.0, 1e-4 - 2e-5j), (20.0, 3e-4 + 1e-4j), (31.0, -2e-4 + 4e-4j), (90.0, 1e-4 + 0j), (180.0, 6e-5j)]
# mount, axis, to, weight, resonances (hz, ratio, gain or mass) or table
PATHS = [("left", "z", "seat", 1, [(6.1, 0.16, None, 2100.0), (27, 0.05, 3e-4, None)]),
         ("right", "z", "seat", -0.7, [(6.1, 0.16, None, 2100.0)]),
         ("rear", "x", "seat", 0.4, [(14, 0.08, None, 5200.0)]),
         ("left", "y", "back", 1.2, [(3.3, 0.2, None, 1800.0)]),
         ("rear", "y", "back", 1, [(9, 0.1, 2e-4, None)]),
         ("right", "y", "ear", 0.9, "air.csv"),
         ("left", "x", "ear", 1, [(57, 0.04, 3.5e-4, None)])]
MEMBERS = ["x", "y", "z", "roll", "pitch", "yaw"]

checks, wrong = 0, []


def near(what, got, expected, rtol, atol=0.0):
    global checks
    checks += 1
    if got is None or not abs(got - expected) <= atol + rtol * abs(expected):
        wrong.append(f"{what}: {got!r}, here {expected!r}")


# ---- the study ----------------------------------------------------------------------------------
def yaml_curve(v, scale):
    if isinstance(v, list):
        return "[" + ", ".join(f"[{x}, {y * scale!r}]" for x, y in v) + "]"
    return repr(v * scale)


def mm(v):
    return "[" + ", ".join(repr(x * 1e3) for x in v) + "]"


QUANTITIES = ([f"mount-force:{m[0]}:{a}" for m in MOUNTS for a in "xyz"] +
              [f"place-acceleration:{p[0]}:{a}" for p in PLACES for a in "xyz"] +
              [f"cab:{p[0]}" for p in POINTS] + [f"shaking:{m}" for m in MEMBERS])


def write_study(folder, name, rotation, quantities):
    text = [f"""title: A V six on three mounts
engine:
  rotation: {rotation}
  bore_mm: 92
  stroke_mm: {STROKE * 1e3!r}
  rod_length_mm: {ROD * 1e3!r}
  pin_offset_mm: {OFFSET * 1e3!r}
  reciprocating_mass_kg: {PISTON}
  firing_order: {ORDER}
  cylinders:"""]
    for k in sorted(ORDER):
        text.append(f"    - {{number: {k}, node: throw{k}, bank_deg: {BANK[k]}, at_mm: {ALONG[k] * 1e3!r}}}")
    text.append(f"""  dispersion: {{cylinder_percent: 0, cyclic_percent: 0}}
train:
  nodes:
    - {{name: throw1, inertia_kgm2: 0.02}}
    - {{name: throw4, inertia_kgm2: 0.02}}
    - {{name: throw2, inertia_kgm2: 0.02}}
    - {{name: throw5, inertia_kgm2: 0.02}}
    - {{name: throw3, inertia_kgm2: 0.02}}
    - {{name: throw6, inertia_kgm2: 0.02}}
    - {{name: flywheel, inertia_kgm2: 0.3}}
    - {{name: load, inertia_kgm2: 3, on: outside}}
  links:
    - {{name: pin1, from: throw1, to: throw4, stiffness_nm_per_rad: 9e5, damping_ratio: 0.01}}
    - {{name: c1, from: throw4, to: throw2, stiffness_nm_per_rad: 4e5, damping_ratio: 0.01}}
    - {{name: pin2, from: throw2, to: throw5, stiffness_nm_per_rad: 9e5, damping_ratio: 0.01}}
    - {{name: c2, from: throw5, to: throw3, stiffness_nm_per_rad: 4e5, damping_ratio: 0.01}}
    - {{name: pin3, from: throw3, to: throw6, stiffness_nm_per_rad: 9e5, damping_ratio: 0.01}}
    - {{name: tail, from: throw6, to: flywheel, stiffness_nm_per_rad: 6e5, damping_ratio: 0.01}}
    - {{name: drive, from: flywheel, to: load, stiffness_nm_per_rad: 2500, damping_ratio: 0.05}}
  flywheel: flywheel
  load: load
body:
  mass_kg: {MASS}
  inertia_kgm2: {{xx: {INERTIA[0][0]}, yy: {INERTIA[1][1]}, zz: {INERTIA[2][2]}, xy: {INERTIA[0][1]}, xz: {INERTIA[0][2]}, yz: {INERTIA[1][2]}}}
  crank_axis_mm: {mm(AXIS)}
  rotating_mass_kg: {ROTATING}
  counterweights:""")
    for at, u, deg in WEIGHTS:
        text.append(f"    - {{at_mm: {at * 1e3!r}, unbalance_kgmm: {u * 1e3!r}, angle_deg: {deg}}}")
    text.append("  balance_shafts:")
    for at, ratio, u, deg in SHAFTS:
        text.append(f"    - {{at_mm: {mm(at)}, ratio: {ratio}, unbalance_kgmm: {u * 1e3!r}, phase_deg: {deg}}}")
    text.append("  mounts:")
    for m, at, turned, k, static, loss in MOUNTS:
        keys = [f"name: {m}", f"at_mm: {mm(at)}", f"loss_factor: {yaml_curve(loss, 1)}"]
        keys += [f"turned_deg: {list(turned)}"] if turned else []
        keys += [f"{a}_n_per_mm: {yaml_curve(v, 1e-3)}" for a, v in zip("xyz", k)]
        keys += [f"static_{a}_n_per_mm: {v * 1e-3!r}" for a, v in zip("xyz", static) if v]
        text.append("    - {" + ", ".join(keys) + "}")
    text.append("  places:")
    text += [f"    - {{name: {p}, at_mm: {mm(at)}}}" for p, at in PLACES]
    text.append("  points:")
    text += [f"    - {{name: {p}, sense: {sense}, weighting: {w}}}" for p, sense, w in POINTS]
    text.append("  paths:")
    for m, axis, to, weight, what in PATHS:
        how = f"table: {what}"
        if not isinstance(what, str):
            how = "resonances: [" + ", ".join(
                f"{{hz: {hz}, damping_ratio: {ratio}, " + (f"gain: {gain}" if gain else f"mass_kg: {mass}") + "}"
                for hz, ratio, gain, mass in what) + "]"
        text.append(f"    - {{mount: {m}, axis: {axis}, to: {to}, weight: {weight}, {how}}}")
    text.append("bands:")
    text.append('  - {name: seat, kind: cab, low_hz: 4, high_hz: 30, quantity: "cab:seat", limit_rms: 0.4}')
    text.append('  - {name: roll, kind: mount, low_hz: 4, high_hz: 90, quantity: roll-torque, limit_rms: 900}')
    text.append("limits:")
    for q in quantities:
        text.append(f'  - {{name: "{q.replace(":", " ")}", quantity: "{q}", statistic: rms, value: 1e6}}')
    text.append("screen: {speeds_rpm: [1300], brake_torque_nm: 120}\n")
    path = os.path.join(folder, name)
    with open(path, "w") as f:
        f.write("\n".join(text))
    with open(os.path.join(folder, "air.csv"), "w") as f:
        f.write("hz,real,imaginary\n" + "".join(f"{hz!r},{z.real!r},{z.imag!r}\n" for hz, z in TABLE))
    return path


# ---- mounts -------------------------------------------------------------------------------------
def at_hz(v, hz):
    return np.interp(hz, *zip(*v)) if isinstance(v, list) else v


def rotation_matrix(deg):
    a, b, c = np.radians(deg if deg else (0, 0, 0))
    x = np.array([[1, 0, 0], [0, math.cos(a), -math.sin(a)], [0, math.sin(a), math.cos(a)]])
    y = np.array([[math.cos(b), 0, math.sin(b)], [0, 1, 0], [-math.sin(b), 0, math.cos(b)]])
    z = np.array([[math.cos(c), -math.sin(c), 0], [math.sin(c), math.cos(c), 0], [0, 0, 1]])
    return x @ y @ z


def motion_of(at):
    """3 x 6: displacement of a point of the body, u + turn x r."""
    x, y, z = at
    return np.array([[1, 0, 0, 0, z, -y], [0, 1, 0, -z, 0, x], [0, 0, 1, y, -x, 0]])


def own_stiffness(mount, hz, static=False):
    _, _, _, k, still, loss = mount
    if static:
        return np.array([s if s else (v[0][1] if isinstance(v, list) else v) for s, v in zip(still, k)], complex)
    return np.array([at_hz(v, hz) for v in k]) * (1 + 1j * at_hz(loss, hz))


def stiffness(hz, static=False):
    out = np.zeros((6, 6), complex)
    for mount in MOUNTS:
        g = rotation_matrix(mount[2]).T @ motion_of(mount[1])
        out += g.T @ np.diag(own_stiffness(mount, hz, static)) @ g
    return out


M = np.block([[MASS * np.eye(3), np.zeros((3, 3))], [np.zeros((3, 3)), INERTIA]])


# ---- shaking: momentum of the moving masses in time ----------------------------------------------
def shaking(direction, W, n=512):
    """Amplitudes of load[order, 6] about the centre of gravity, orders 0 .. 24."""
    theta = 2 * math.pi * np.arange(n) / n
    load = np.zeros((n, 6))

    def add(mass, place):
        """A point mass: the housing feels - m r'' at r; place: [n, 3] over a turn."""
        k = np.fft.fftfreq(n, 1 / n)[:, None]
        force = -mass * np.fft.ifft(-(W * k) ** 2 * np.fft.fft(place, axis=0), axis=0).real
        load[:, :3] += force
        load[:, 3:] += np.cross(place, force)

    def turned(up):
        """Unit vector that stands `up` rad from up, positive about x."""
        return np.stack([np.zeros_like(up), -np.sin(up), np.cos(up)], axis=1)

    r = STROKE / 2
    first_pin = None
    for slot, number in enumerate(ORDER):
        fire, bank = slot * 2 * math.pi * 2 / 6, math.radians(BANK[number])
        at = AXIS + np.array([ALONG[number], 0, 0])
        along = np.array([0, math.sin(bank), math.cos(bank)])
        beside = direction * np.array([0, -math.cos(bank), math.sin(bank)])  # where the pin goes after top
        phi = theta - fire + math.asin(OFFSET / (r + ROD))
        height = r * np.cos(phi) + np.sqrt(ROD ** 2 - (r * np.sin(phi) - OFFSET) ** 2)
        add(PISTON, at + height[:, None] * along + OFFSET * beside)
        pin = np.outer(np.cos(phi), along) + np.outer(np.sin(phi), beside)
        first_pin = pin if slot == 0 else first_pin
        add(ROTATING, at + r * pin)
    for along, u, deg in WEIGHTS:
        a = direction * math.radians(deg)
        y = math.cos(a) * first_pin[:, 1] - math.sin(a) * first_pin[:, 2]
        z = math.sin(a) * first_pin[:, 1] + math.cos(a) * first_pin[:, 2]
        add(1.0, AXIS + np.stack([np.full(n, along), u * y, u * z], axis=1))
    for at, ratio, u, deg in SHAFTS:
        add(1.0, np.array(at) + u * turned(direction * (math.radians(deg) + ratio * theta)))
    return 2 * np.fft.rfft(load, axis=0)[:25] / n


# ---- weightings by poles and zeros (ISO 2631-1 annex A; IEC 61672-1) ------------------------------
def body_weighting(horizontal):
    def second(f, q):
        w = 2 * math.pi * f
        return np.poly1d([1 / w ** 2, 1 / (q * w), 1])
    w3 = 2 * math.pi * (2.0 if horizontal else 12.5)
    num = np.poly1d([1 / (2 * math.pi * 0.4) ** 2, 0, 0]) * np.poly1d([1 / w3, 1])
    den = second(0.4, math.sqrt(0.5)) * second(100, math.sqrt(0.5)) * second(w3 / (2 * math.pi), 0.63)
    if not horizontal:
        num, den = num * second(2.37, 0.91) * (2.37 / 3.35) ** 2, den * second(3.35, 0.91)
    return num, den


def weighting(name, hz):
    s = 2j * math.pi * np.asarray(hz)
    if name == "a":
        w = [2 * math.pi * f for f in (20.598997, 107.65265, 737.86223, 12194.217)]
        def gain(s):
            return abs(w[3] ** 2 * s ** 4 / ((s + w[0]) ** 2 * (s + w[1]) * (s + w[2]) * (s + w[3]) ** 2))
        return gain(s) * 10 ** (2.000 / 20)  # 1 at 1000 Hz, as the standard rounds it
    num, den = body_weighting(name == "wd")
    return num(s) / den(s)


def transfer(what, hz):
    if isinstance(what, str):
        f, z = [row[0] for row in TABLE], np.array([row[1] for row in TABLE])
        return np.interp(hz, f, z.real, 0, 0) + 1j * np.interp(hz, f, z.imag, 0, 0)
    out = 0
    for f0, ratio, gain, mass in what:
        r = hz / f0
        out += (gain if gain else -r * r / mass) / (1 - r * r + 2j * ratio * r)
    return out


# ---- comparison ---------------------------------------------------------------------------------
def tacet(*words):
    run = subprocess.run([TACET, *words, "--json"], capture_output=True, text=True, check=False)
    if run.returncode:
        sys.exit(f"tacet {' '.join(words)}: exit {run.returncode}\n{run.stderr}")
    return json.loads(run.stdout)


def compare_modes(study, direction):
    body = tacet("modes", study)["body"]
    for n, got in enumerate(body["modes"]):
        def off(hz):
            return eigh(stiffness(hz).real, M, eigvals_only=True)[n] - (2 * math.pi * hz) ** 2
        hz = brentq(off, 0.5, 60, xtol=1e-13, rtol=1e-13)
        K = stiffness(hz)
        v = eigh(K.real, M)[1][:, n]
        share = v * (M @ v) / (v @ M @ v)
        near(f"mode {n} hz", got["hz"], hz, 1e-8)
        near(f"mode {n} loss", got["loss_factor"], (v @ K.imag @ v) / (v @ K.real @ v), 1e-7)
        for i, member in enumerate(MEMBERS):
            near(f"mode {n} share {member}", got["energy_share"][member], share[i], 0, 1e-7)
            scaled = got["shape"][member] * np.sign(got["shape"]["y"] * v[1])
            near(f"mode {n} shape {member}", scaled, v[i] * abs(got["shape"]["y"] / v[1]), 1e-5, 1e-6)
    still = stiffness(0, static=True).real
    down = np.linalg.solve(still, [0, 0, -MASS * 9.80665, 0, 0, 0])
    turned = np.linalg.solve(still, [0, 0, 0, direction, 0, 0])
    axis = np.linalg.inv(INERTIA)[:, 0]
    axis /= np.linalg.norm(axis)
    for i, member in enumerate(MEMBERS):
        near(f"under_weight {member}", body["under_weight"][member], down[i], 1e-9, 1e-12)
        near(f"per_nm_about_crank {member}", body["per_nm_about_crank"][member], turned[i], 1e-9, 1e-15)
    for i in range(3):
        near(f"torque_roll_axis {i}", body["torque_roll_axis"][i], axis[i], 1e-9)


def lines_here(roll, orders, direction, W):
    """Every quantity's lines from the lines of the roll torque: name -> amplitudes over orders."""
    load = shaking(direction, W)
    out = {q: np.zeros(len(orders), complex) for q in QUANTITIES}
    for i, order in enumerate(orders):
        hz, w = order * W / (2 * math.pi), order * W
        shaken = load[round(order)] if abs(order - round(order)) < 1e-9 and round(order) <= 24 else np.zeros(6)
        for k, member in enumerate(MEMBERS):
            out[f"shaking:{member}"][i] = shaken[k]
        q = np.linalg.solve(stiffness(hz) - w * w * M, shaken + np.array([0, 0, 0, direction * roll[i], 0, 0]))
        for mount in MOUNTS:
            force = own_stiffness(mount, hz) * (rotation_matrix(mount[2]).T @ motion_of(mount[1]) @ q)
            for k in range(3):
                out[f"mount-force:{mount[0]}:{'xyz'[k]}"][i] = force[k]
        for name, at in PLACES:
            for k in range(3):
                out[f"place-acceleration:{name}:{'xyz'[k]}"][i] = -w * w * (motion_of(at) @ q)[k]
        for m, axis, to, weight, what in PATHS:
            out[f"cab:{to}"][i] += weight * transfer(what, hz) * out[f"mount-force:{m}:{axis}"][i]
        for name, _, kind in POINTS:
            out[f"cab:{name}"][i] *= weighting(kind, hz)
    return out


def amplitudes(q):
    return (np.array([a * np.exp(1j * math.radians(p)) for _, a, p in q["orders"]]),
            np.array([order for order, _, _ in q["orders"]]))


def compare_point(study, quantities, direction, word, rpm):
    got = tacet("point", study, "--pattern", word, "--speed", str(rpm))
    W = rpm * math.pi / 30
    roll, orders = amplitudes(got["quantities"]["roll-torque"])
    here = lines_here(roll, orders, direction, W)
    mean = got["quantities"]["roll-torque"]["mean"]
    still = np.linalg.solve(stiffness(0, static=True).real, [0, 0, 0, direction * mean, 0, 0])
    for name in quantities:
        q = got["quantities"][name]
        line, its = amplitudes(q)
        what = f"{os.path.basename(study)} {word} at {rpm}: {name}"
        near(f"{what}: lines", len(its), len(orders), 0)
        largest = max(abs(here[name]))
        near(f"{what}: lines off", max(abs(line - here[name])), 0, 0, 1e-8 * largest)
        expected = 0.0
        if name.startswith("mount-force"):
            mount = next(m for m in MOUNTS if m[0] == name.split(":")[1])
            own = own_stiffness(mount, 0, static=True).real * (rotation_matrix(mount[2]).T @ motion_of(mount[1]) @ still)
            expected = own["xyz".index(name[-1])]
        near(f"{what}: mean", q["mean"], expected, 1e-8, 1e-9)
    for limit in got["limits"]:
        name = next(q for q in quantities if q.replace(":", " ") == limit["name"])
        near(f"{word} at {rpm}: rms of {name}", limit["value"], math.sqrt(sum(abs(here[name]) ** 2) / 2), 1e-8)
    hz = orders * W / (2 * math.pi)
    inside = (hz >= 4 * 0.95) & (hz <= 30 * 1.05)
    near(f"{word} at {rpm}: level of the seat", got["bands"][0]["level_rms"],
         math.sqrt(sum(abs(here["cab:seat"][inside]) ** 2) / 2), 1e-8)
    return here["cab:seat"], orders, W


def filtered_rms(line, orders, W, kind):
    """The weighted rms by a digital filter on samples of what is not weighted: bilinear transform."""
    hz = orders * W / (2 * math.pi)
    raw = line / weighting(kind, hz)
    repeat, n = 2 * math.pi / (W * orders[0]), 1 << 15
    t = repeat * np.arange(n) / n
    samples = np.real(np.exp(2j * math.pi * np.outer(t, hz)) @ raw)
    num, den = body_weighting(kind == "wd")
    sos = signal.zpk2sos(*signal.bilinear_zpk(*signal.tf2zpk(num.coeffs, den.coeffs), fs=n / repeat))
    out = signal.sosfilt(sos, np.tile(samples, math.ceil(12 / repeat)))[-n:]  # 12 s: 0.4 Hz has settled
    return math.sqrt(np.mean(out ** 2))


def main():
    with tempfile.TemporaryDirectory() as folder:
        for rotation, direction in (("clockwise", 1), ("counterclockwise", -1)):
            parts = [QUANTITIES[:12], QUANTITIES[12:]]
            studies = [write_study(folder, f"{rotation}-{i}.yaml", rotation, part) for i, part in enumerate(parts)]
            compare_modes(studies[0], direction)
            for study, part in zip(studies, parts):
                for word, rpm in (("x", 1300), ("x.xx.", 1300)):
                    seat, orders, W = compare_point(study, part, direction, word, rpm)
            near(f"{rotation}: seat by a filter in time", filtered_rms(seat, orders, W, "wk"),
                 math.sqrt(sum(abs(seat) ** 2) / 2), 1e-4)
    print("\n".join(wrong))
    print(f"{checks} numbers compared, {len(wrong)} wrong")
    return bool(wrong)


if __name__ == "__main__":
    sys.exit(main())
