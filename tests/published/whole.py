#!/usr/bin/env python3
"""The whole program against numpy and scipy: `point`, `modes` and `screen` as JSON.

usage: whole.py TACET   (writes its studies into a folder of its own)

No number of the program goes into what it is compared with, but for the words it has solved and the
places near which the edges of its no-go ranges are looked for.
"""
import cmath
import json
import math
import os
import subprocess
import sys
import tempfile

sys.dont_write_bytecode = True  # no cache beside the sources

import numpy as np
from scipy.integrate import simpson
from scipy.optimize import brentq
from whole_model import (AREA, BANDS, CYCLIC_SIGMA, CYLINDER_SIGMA, DEMAND, DENSITIES, GUARD, LIMITS, LINKS,
                         LOADS, N, NODES, RESERVE_DB, SPEEDS, Condition, Train, fired_kpa, skipped_kpa, slider,
                         write_study)

TACET = sys.argv[1]
MARGIN_DB = 0.005  # of margins with both levels' share of cyclic variation


# ---- comparison ---------------------------------------------------------------------------------
checks = 0
wrong = []


def near(what, got, expected, rtol, atol=0.0):
    global checks
    checks += 1
    if got is None or not abs(got - expected) <= atol + rtol * abs(expected):
        wrong.append(f"{what}: {got!r}, here {expected!r}")


def same(what, got, expected):
    global checks
    checks += 1
    if got != expected:
        wrong.append(f"{what}: {got!r}, here {expected!r}")


def tacet(*words):
    run = subprocess.run([TACET, *words, "--json"], capture_output=True, text=True, check=False)
    if run.returncode:
        sys.exit(f"tacet {' '.join(words)}: exit {run.returncode}\n{run.stderr}")
    return json.loads(run.stdout)


def demand_at(rpm):
    return float(np.interp(rpm, *DEMAND))


references = {}


def reference(train):
    """All-fire levels at their worst screened speed."""
    if train not in references:
        levels = []
        for rpm in SPEEDS:
            c = Condition(train, "x", rpm, demand_at(rpm), "ripple")
            if c.reached:
                levels.append([c.level(band)[1] for band in BANDS])
        references[train] = np.max(levels, axis=0)
    return references[train]


def resolved(train, i):
    limits = BANDS[i][5]
    out = limits.get("limit_rms", math.inf)
    if "over_all_fire_db" in limits:
        out = min(out, max(limits["floor_rms"],
                           reference(train)[i] * 10 ** (limits["over_all_fire_db"] / 20)))
    return out


def verdict(margin):
    return "over" if margin < 0 else "near" if margin < RESERVE_DB else "clear"


def compare_bands(what, got, c, rtol):
    margins = []
    for i, band in enumerate(BANDS):
        b, name = got["bands"][i], f"{what}: band {band[0]}"
        nominal, dispersed, leading, peak, cyclic = c.level(band)
        limit = resolved(c.train, i)
        margin = 20 * math.log10(limit / dispersed)
        scale = dispersed * rtol
        near(f"{name} nominal_rms", b["nominal_rms"], nominal, rtol, scale)
        # the program keeps 1e-3 of |H|^2 in its integral over cycle-to-cycle variation, half in the rms
        spread = rtol + 5e-4 * cyclic
        near(f"{name} level_rms", b["level_rms"], dispersed, spread)
        near(f"{name} limit_rms", b["limit_rms"], limit, rtol + 5e-4)
        near(f"{name} margin_db", b["margin_db"], margin, 0, 10 * (spread + 5e-4))
        if leading is not None:
            near(f"{name} leading_peak", b["leading_peak"], peak, rtol, scale)
            near(f"{name} leading_order", b["leading_order"], leading, 1e-12)
        else:
            same(f"{name} leading_order", b["leading_order"], None)
        if abs(margin) > 0.01 and abs(margin - RESERVE_DB) > 0.01:
            same(f"{name} verdict", b["verdict"], verdict(margin))
        margins.append(margin)
    for i, (name, quantity, statistic, value) in enumerate(LIMITS):
        b = got["limits"][i]
        here = c.limit(quantity, statistic)
        margins.append(20 * math.log10(value / here))
        near(f"{what}: limit {name}", b["value"], here, rtol)
        near(f"{what}: limit {name} margin_db", b["margin_db"], margins[-1], 0, 20 * rtol)
    near(f"{what}: worst_margin_db", got["worst_margin_db"], min(margins), 0, MARGIN_DB)
    names = [x[0] for x in BANDS] + [x[0] for x in LIMITS]
    same(f"{what}: limited_by", got["limited_by"], names[int(np.argmin(margins))])


def compare_duty(what, got, c):
    duty = got["duty"]
    near(f"{what}: charge_kpa", duty["charge_kpa"], c.load, 1e-5)
    near(f"{what}: charge_ratio", duty["charge_ratio"], (c.load - LOADS[0]) / (LOADS[-1] - LOADS[0]), 1e-5)
    near(f"{what}: fuel_kg_per_h", duty["fuel_kg_per_h"], c.fuel(), 1e-5)
    near(f"{what}: friction_kw", duty["friction_kw"], c.friction * c.W / 1e3, 1e-9)
    near(f"{what}: brake_kw", duty["brake_kw"], got["demand_nm"] * c.W / 1e3, 1e-9)
    near(f"{what}: peak_pressure_mpa", duty["peak_pressure_mpa"], c.peak_mpa(), 1e-5)
    # work of the two strokes between the gas-exchange bottoms, which a pressure above the
    # crankcase's or below it does not change
    lost = 0
    a = np.radians(np.arange(-360, -179.9, 0.25))
    b = np.radians(np.arange(180, 360.1, 0.25))
    for s in range(N):
        for k in range(c.roll.cycles):
            skips = c.roll.skips_before(s, k)
            for x in (a, b):
                deg = np.degrees(x)
                p = (fired_kpa(deg, c.load, skips > 0) if c.roll.fire[s][k] else
                     skipped_kpa(deg, skips + 1))
                lost -= simpson(p * 1e3 * AREA * slider(x)[1], x=x)
    near(f"{what}: pumping_kw", duty["pumping_kw"], lost * c.rpm / 60 / c.R / 1e3, 1e-4, 1e-6)


def compare_point(study, train, word, rpm, level, rtol):
    demand = demand_at(rpm)
    what = f"{os.path.basename(study)} {word} at {rpm} rpm, {level}"
    got = tacet("point", study, "--pattern", word, "--speed", str(rpm), "--level", level)
    c = Condition(train, word, rpm, demand, "constant" if level == "constant" else "ripple")
    all_fire = Condition(train, "x", rpm, demand, "constant" if level == "constant" else "ripple")
    near(f"{what}: demand_nm", got["demand_nm"], demand, 1e-12)
    same(f"{what}: method", got["solver"]["method"], level)
    same(f"{what}: revolutions", got["revolutions"], c.R)
    near(f"{what}: density", got["density"], c.roll.fires / (N * c.roll.cycles), 1e-12)
    compare_duty(what, got, c)
    near(f"{what}: fuel_vs_all_fire", got["duty"]["fuel_vs_all_fire"], c.fuel() / all_fire.fuel(), 2e-5)
    compare_bands(what, got, c, rtol)
    for name, q in got["quantities"].items():
        if name.startswith(("damper-heat", "peak-pressure")):
            continue
        high, low, mean, z = c.extremes(name)
        scale = np.max(np.abs(z))
        near(f"{what}: {name} mean", q["mean"], mean, rtol, rtol * scale)
        near(f"{what}: {name} pp", q["pp"], high - low, rtol)
        high, low, _, _ = all_fire.extremes(name)
        near(f"{what}: {name} all_fire_pp", q["all_fire_pp"], high - low, rtol)
        # a number a line: the worst of them is what is compared
        orders = np.array([row[0] for row in q["orders"]])
        line = np.array([row[1] * cmath.exp(1j * math.radians(row[2])) for row in q["orders"]])
        at = np.rint(orders * c.R).astype(int)
        same(f"{what}: {name} orders", bool(np.allclose(orders * c.R, at, atol=1e-9)), True)
        near(f"{what}: {name} largest difference of a line", np.max(np.abs(line - z[at - 1])), 0, 0,
             rtol * scale)
        missing = np.abs(np.delete(z, at - 1))
        near(f"{what}: {name} lines left out", np.max(missing, initial=0), 0, 0, rtol * scale)


def compare_modes(study, train):
    got = tacet("modes", study)["train"]
    same("modes: number", len(got["modes"]), len(NODES))
    near("modes: total_inertia_kgm2", got["total_inertia_kgm2"],
         float(np.sum(train.J * train.ratio ** 2)), 1e-9)
    for i, mode in enumerate(got["modes"]):
        near(f"modes: hz {i}", mode["hz"], train.hz[i] if i else 0, 1e-9, 1e-9)
        shape = train.shape[:, i] / train.shape[np.argmax(np.abs(train.shape[:, i])), i]
        for k, node in enumerate(NODES):
            near(f"modes: shape {i} {node[0]}", mode["shape"][node[0]], shape[k], 1e-6, 1e-7)
        for critical in mode["criticals"]:
            near(f"modes: critical of {i}", critical["speed_rpm"],
                 60 * train.hz[i] / critical["order"], 1e-9)
    got = tacet("modes", study, "--response", "gearbox", "--frequencies", "2:302:1.5")["response"]
    f = np.array(got["frequency_hz"])
    same("response: frequencies", len(f), 201)
    force = np.zeros((len(f), len(NODES)), complex)
    force[:, 6] = 1
    angle = train.solve(2 * math.pi * f, force)
    gain, phase = np.array(got["angle_rad_per_nm"]), np.radians(got["phase_deg"])
    near("response: angle", np.max(np.abs(gain * np.exp(1j * phase) / angle[:, 6] - 1)), 0, 0, 1e-8)
    torque = np.abs(train.impedance(2 * math.pi * f) * (angle @ train.row.T))
    for i, link in enumerate(LINKS):
        near(f"response: torque of {link[0]}",
             np.max(np.abs(np.array(got[f"{link[0]}_nm_per_nm"]) / torque[:, i] - 1)), 0, 0, 1e-8)


def rotations(word):
    """All words that are the same density with another placement, cylinders considered."""
    return {word[k:] + word[:k] for k in range(math.gcd(len(word), N))}


def worst_of(train, word, rpm):
    rows = [Condition(train, w, rpm, demand_at(rpm), "ripple") for w in sorted(rotations(word))]
    return rows if rows[0].reached else []


def compare_screen(study, train):
    got = tacet("screen", study)
    words = {row["candidate"]: row["word"] for row in got["conditions"]}
    same("screen: candidates", sorted(words), sorted(DENSITIES))
    rows = {(row["candidate"], row["speed_rpm"]): row for row in got["conditions"]
            if not row["extra_speed"]}
    same("screen: conditions", len(rows), len(DENSITIES) * len(SPEEDS))
    clear = {rpm: [] for rpm in SPEEDS}
    margin = {}
    for name in DENSITIES:
        for rpm in SPEEDS:
            what, row = f"screen: {name} at {rpm}", rows[name, rpm]
            cases = worst_of(train, words[name], rpm)
            same(f"{what} outcome", row["outcome"], "solved" if cases else "unreachable")
            if not cases:
                continue
            margins = []
            for c in cases:
                levels = [20 * math.log10(resolved(train, i) / c.level(b)[1]) for i, b in enumerate(BANDS)]
                margins.append(min(levels + [20 * math.log10(x[3] / c.limit(x[1], x[2])) for x in LIMITS]))
            margin[name, rpm] = min(margins)
            near(f"{what} worst_margin_db", row["worst_margin_db"], min(margins), 0, MARGIN_DB)
            same(f"{what} verdict", row["verdict"], verdict(min(margins)))
            if verdict(min(margins)) == "clear":
                clear[rpm].append((cases[0].fuel(), name))
    compare_ranges(got, train, words)
    for note in got["candidates"]:
        mine = [rows[note["candidate"], rpm]["verdict"] for rpm in SPEEDS]
        for kind, key in (("clear", "clear"), ("near", "near"), ("over", "over"), ("none", "unreachable")):
            same(f"candidate {note['candidate']}: {key}", note[key], mine.count(kind))
        same(f"candidate {note['candidate']}: best_at", note["best_at"],
             sum(row["run"] == note["candidate"] and row["status"] == "recommended"
                 for row in got["ranking"]))
    recommended = {note["candidate"] for note in got["candidates"] if note["recommended"] == "yes"}
    same("screen: verdicts of all kinds", {row["verdict"] for row in rows.values()},
         {"clear", "near", "over", "none"})
    ran = 0
    for row in got["ranking"]:
        rpm = row["speed_rpm"]
        fuel = {name: fuel for fuel, name in clear[rpm]}
        if row["status"] != "recommended":
            same(f"ranking at {rpm}: none", recommended & set(fuel), set())
            continue
        ran += 1
        same(f"ranking at {rpm}: clear", row["run"] in fuel, True)
        near(f"ranking at {rpm}: fuel", row["fuel_kg_per_h"], fuel.get(row["run"], 0), 1e-5)
        near(f"ranking at {rpm}: margin", row["margin_db"], margin[row["run"], rpm], 0, MARGIN_DB)
        all_fire = Condition(train, "x", rpm, demand_at(rpm), "constant").fuel()
        near(f"ranking at {rpm}: saving", row["saving_percent"],
             100 * (1 - fuel.get(row["run"], 0) / all_fire), 0, 2e-3)
        best = min(((f, name) for name, f in fuel.items() if name in recommended), default=None)
        same(f"ranking at {rpm}: run", row["run"], best and best[1])
    same("ranking: some run", ran > 3, True)


def compare_random(study, train, word, rpm, repeats):
    """What dispersion adds to the mean square of each band, against cylinders and cycles drawn at random
    one by one over a long stretch of time: 4 standard errors, and 1 % for the grain of its lines."""
    rng = np.random.default_rng(1902)
    got = tacet("point", study, "--pattern", word, "--speed", str(rpm), "--level", "constant")
    c = Condition(train, word, rpm, demand_at(rpm), "constant")
    fires = [(s, k * c.roll.cycles + j) for s in range(N) for k in range(repeats)
             for j in range(c.roll.cycles) if c.roll.fire[s][j]]
    slot = np.array([s for s, _ in fires])
    top = np.array([4 * math.pi * (s / N + k) for s, k in fires])
    for i, band in enumerate(BANDS):
        low, high = band[2] * (1 - GUARD[band[1]]), band[3] * (1 + GUARD[band[1]])
        step = rpm / 60 / c.R / repeats
        f = step * np.arange(math.ceil(low / step), math.floor(high / step) + 1)
        w = 2 * math.pi * f
        q = w / c.W
        one = c.roll.fired_pulse(q, c.load) / (math.pi * c.R * repeats)
        # quantity of every single fire on every line
        H = c.quantity(band[4], w, c.unit(w))[1]
        response = H[:, slot] * one[:, None] * np.exp(-1j * np.outer(q, top))
        square = []
        for _ in range(4):
            draws = CYLINDER_SIGMA * rng.standard_normal((N, 1000))[slot]
            draws = draws + CYCLIC_SIGMA * rng.standard_normal((len(fires), 1000))
            square.extend(np.sum(np.abs(response @ draws) ** 2, axis=0) / 2)
        here, error = np.mean(square), np.std(square) / math.sqrt(len(square))
        b, what = got["bands"][i], f"random {word} at {rpm}: band {band[0]}"
        same(f"{what}: enough draws", error < 0.03 * here, True)
        near(what, b["level_rms"] ** 2 - b["nominal_rms"] ** 2, here, 0.01, 4 * error)


def compare_ranges(got, train, words):
    """Every closed edge by brentq between what a scan of 10 rpm brackets."""
    def excess(name, i, rpm):
        cases = worst_of(train, words[name], rpm)
        return max(math.log(c.level(BANDS[i])[1] / resolved(train, i)) for c in cases) if cases else -1

    same("no_go: some", len(got["no_go"]) > 0, True)
    closed = 0
    for row in got["no_go"]:
        i = [band[0] for band in BANDS].index(row["band"])
        for key, inside, end in (("from_rpm", 1, "below"), ("to_rpm", -1, "above")):
            edge = row[key]
            if row["open"] in (end, "both ends"):
                same(f"no_go {row['candidate']} {row['band']}: open", edge in (SPEEDS[0], SPEEDS[-1]) or
                     not worst_of(train, words[row["candidate"]], edge - inside), True)
                continue
            what = f"no_go {row['candidate']} {row['band']} {key} {edge}"
            a, b = excess(row["candidate"], i, edge - 2), excess(row["candidate"], i, edge + 2)
            same(f"{what}: side", (a < 0) == (inside > 0) and (b < 0) == (inside < 0), True)
            if a * b < 0:
                here = brentq(lambda n: excess(row["candidate"], i, n), edge - 2, edge + 2, xtol=0.01)
                near(what, edge, here, 0, 0.5)
                closed += 1
    same("no_go: closed edges", closed > 2, True)


def main():
    with tempfile.TemporaryDirectory(prefix="tacet-whole-") as folder:
        viscous, lossy = Train(True), Train(False)
        a = write_study(folder, "viscous.yaml", True)
        b = write_study(folder, "lossy.yaml", False)
        compare_modes(a, viscous)
        compare_modes(b, lossy)
        for word in ("x", "xx.", "x..x."):
            compare_point(b, lossy, word, 1900, "constant", 1e-5)
        for word in ("x", ".x", "..xx.x"):
            compare_point(b, lossy, word, 1350, "ripple", 2e-5)
        compare_point(a, viscous, "x.x", 1350, "steady", 1e-4)
        compare_random(b, lossy, "x", 1900, 96)
        compare_random(b, lossy, "x..x.", 1900, 24)
        compare_screen(b, lossy)
    print("\n".join(wrong))
    print(f"{checks} numbers compared, {len(wrong)} wrong")
    return bool(wrong)


if __name__ == "__main__":
    sys.exit(main())
