"""usage: cylinder.py CYCLES   cylinder cycles a second time, with scipy.

CYCLES prints cycles and duties of the program as JSON. Here each is computed again from the laws
as published, stated apart from the program: mass and temperature of the gas are integrated (the
program integrates energies), with valves open temperature alone, since pressure is then given;
Runge-Kutta of eighth order with error control between the angles at which something begins or ends.
"""
import json
import math
import subprocess
import sys

from scipy.integrate import solve_ivp
from scipy.optimize import brentq

R = 287.0
DEG = math.pi / 180


def gamma(T):  # falls linearly with temperature (Gatowski et al., SAE 841359, from memory)
    return 1.38 - 0.08e-3 * (T - 300)


def cv(T):
    return R / (gamma(T) - 1)


def u(T):  # integral of cv from 300 K
    return R / 0.08e-3 * math.log(0.38 / (gamma(T) - 1))


def h(T):
    return u(T) + R * T


def nozzle(p, T, ratio):
    """Mass flow per area of an isentropic nozzle (any text on gas dynamics), choked where it must
    be; within 5 % of equal pressures the parabola through rest that joins in value and slope."""
    g = gamma(T)
    critical = (2 / (g + 1)) ** (g / (g - 1))

    def flow(r):
        r = max(r, critical)
        return math.sqrt(2 * g / (g - 1) * (r ** (2 / g) - r ** ((g + 1) / g)))

    if ratio <= 0.95:
        f = flow(ratio)
    else:
        step = 1e-5
        slope = (flow(0.95 + step) - flow(0.95 - step)) / (2 * step)  # over the ratio
        a = (2 * flow(0.95) + 0.05 * slope) / 0.05
        b = -(flow(0.95) + 0.05 * slope) / 0.05**2
        f = (1 - ratio) * (a + b * (1 - ratio))
    return f * p / math.sqrt(R * T)


def wiebe(y):  # a = 6.908, m = 2, all fuel burnt at y = 1
    y = min(max(y, 0), 1)
    return (1 - math.exp(-6.908 * y**3)) / (1 - math.exp(-6.908))


class Cylinder:
    def __init__(self, d):
        self.d = d
        r, l, e = d["stroke_m"] / 2, d["rod_m"], d["offset_m"]
        self.r, self.l, self.e = r, l, e
        self.top = math.sqrt((l + r) ** 2 - e**2)
        self.turn = math.asin(e / (l + r))
        stroke = self.top - math.sqrt((l - r) ** 2 - e**2)
        self.area = math.pi / 4 * d["bore_m"] ** 2
        self.swept = self.area * stroke
        self.small = self.swept / (d["ratio"] - 1)
        self.speed = d["rpm"] * 2 * math.pi / 60
        self.piston = d["stroke_m"] * d["rpm"] / 30  # mean speed, 2 S N
        end = 1 - math.exp(-6.908)
        share = [(-math.log1p(-x * end) / 6.908) ** (1 / 3) for x in (0.1, 0.5, 0.9)]
        self.duration = d["burn_deg"] / (share[2] - share[0])
        self.start = d["mid_deg"] - share[1] * self.duration  # degrees after firing top

    def volume(self, a):  # a: degrees after a top
        phi = a * DEG + self.turn
        b = self.r * math.sin(phi) - self.e
        g = math.sqrt(self.l**2 - b * b)
        V = self.small + self.area * (self.top - self.r * math.cos(phi) - g)
        dV = self.area * (self.r * math.sin(phi) + b * self.r * math.cos(phi) / g)
        return V, dV * DEG

    def heat(self, a, p, T, V, gas, burning, is_open):
        """Woschni (Heywood eq. 12.51, from memory), J per degree."""
        w = (6.18 if is_open else 2.28) * self.piston
        if burning and not is_open:
            pr, Tr, Vr, n = gas["reference"]
            w += 3.24e-3 * self.swept * Tr / (pr * Vr) * max(0, p - pr * (Vr / V) ** n)
        coefficient = 3.26 * self.d["bore_m"] ** -0.2 * (p / 1e3) ** 0.8 * T**-0.55 * w**0.8
        wall = 2 * self.area + math.pi * self.d["bore_m"] * V / self.area
        return coefficient * wall * (T - self.d["wall_K"]) * DEG / self.speed

    def rings(self, p, T):
        """Mass out past the rings, kg per degree, and the temperature it has."""
        d = self.d
        if d["rings_m2"] == 0:
            return 0.0, T
        per = d["rings_m2"] * DEG / self.speed
        if p >= d["crankcase_Pa"]:
            return per * nozzle(p, T, d["crankcase_Pa"] / p), T
        return -per * nozzle(d["crankcase_Pa"], d["wall_K"], p / d["crankcase_Pa"]), d["wall_K"]

    # Summed over a repeat, J: work, wall, exhaust, rings; enthalpies over that of the manifold.
    def shut(self, gas, a0, a1, top, total, out, fuel):
        """Valves shut from a0 to a1; `top` is the firing top's angle in this half."""
        h_in = h(self.d["intake_K"])

        def rate(a, y):
            m, T = y[0], y[1]
            V, dV = self.volume(a)
            p = m * R * T / V
            dQ = self.heat(a, p, T, V, gas, fuel > 0 and a >= top + self.start, False)
            db, Tb = self.rings(p, T)
            x = (a - top - self.start) / self.duration
            dx = 0.0
            if fuel > 0 and 0 < x < 1:
                dx = 3 * 6.908 * x * x * math.exp(-6.908 * x**3) / self.duration
                dx /= 1 - math.exp(-6.908)
            dT = (fuel * dx - p * dV - dQ - db * (h(Tb) - u(T))) / (m * cv(T))
            return [-db, dT, p * dV, dQ, 0.0, db * (h(Tb) - h_in)]

        y = self.integrate(rate, [gas["m"], gas["T"], 0, 0, 0, 0], a0, a1,
                           lambda a, y: y[0] * R * y[1] / self.volume(a)[0], out)
        gas["m"], gas["T"] = y[0], y[1]
        for i in range(4):
            total[i] += y[2 + i]

    def valve(self, gas, a0, a1, start, span, p0, p1, inlet, total, out):
        """A valve is open from a0 to a1: pressure goes from p0 at `start` to p1 over `span`.
        State: temperature, gas out in the inlet port and its enthalpy, fresh gas drawn in, sums."""
        h_in = h(self.d["intake_K"])

        def pressure(a):
            z = min((a - start) / span, 1)
            return p0 + (p1 - p0) * z * z * (3 - 2 * z), (p1 - p0) * 6 * z * (1 - z) / span

        def rate(way):  # way: enthalpy of what flows, or None: the cylinder's own
            def f(a, y):
                T = y[0]
                V, dV = self.volume(a)
                p, dp = pressure(a)
                m = p * V / (R * T)
                dQ = self.heat(a, p, T, V, gas, False, True)
                db, Tb = self.rings(p, T)
                hv = h(T) if way is None else way
                # first law with the mass that keeps the pressure
                k = m * (dp / p + dV / V) + db
                dT = -p * dV - dQ + k * (hv - u(T)) - db * (h(Tb) - u(T))
                dT /= m * (cv(T) + (hv - u(T)) / T)
                dm = k - m * dT / T
                back = inlet and way != h_in
                return [dT, -dm if back else 0, -dm * hv if back else 0, dm,
                        p * dV, dQ, -dm * (hv - h_in), db * (h(Tb) - h_in)]
            return f

        def inflow(a, y):  # its sign does not depend on what flows
            return rate(h_in)(a, y)[3]

        def gone(a, y):
            return y[1]

        def given(a, y):
            return pressure(a)[0]

        inflow.terminal = gone.terminal = True
        y, a, way = [gas["T"], 0, 0, 0, 0, 0, 0, 0], a0, None
        if inlet and inflow(a0 + 1e-9, y) > 0:
            way = h_in
        while a < a1:  # out, back again, and then fresh
            events = None
            if inlet:
                inflow.direction, gone.direction = 1 if way is None else -1, -1
                events = [inflow] if way is None or way == h_in else [inflow, gone]
            y, a = self.integrate(rate(way), y, a, a1, given, out, events, True)
            if a >= a1:
                break
            if way is None:
                way = y[2] / y[1]
            elif way != h_in and abs(y[1]) < 1e-12:
                way, y[1], y[2] = h_in, 0, 0
            else:
                way = None
        V, p = self.volume(a1)[0], pressure(a1)[0]
        gas["T"], gas["m"] = y[0], p * V / (R * y[0])
        for i in range(4):
            total[i] += y[4 + i]
        return y[3]

    def integrate(self, rate, y, a0, a1, trace, out, event=None, where=False):
        s = solve_ivp(rate, (a0, a1), y, method="DOP853", rtol=1e-6, atol=1e-12, events=event,
                      dense_output=out is not None)
        if not s.success:
            raise SystemExit("solve_ivp: " + s.message)
        for a in range(math.ceil(a0), math.ceil(s.t[-1])) if out else ():
            out[a] = trace(a, s.sol(a))
        last = list(s.y[:, -1])
        return (last, s.t[-1]) if where else last

    def up(self, gas, opens, fires, charge, total, out):
        """Intake and compression; charge: manifold pressure, or share of the most fuel."""
        d, fuel = self.d, 0.0
        fresh = 0.0
        if opens:
            p0 = gas["m"] * R * gas["T"] / self.volume(0)[0]
            manifold = d["highest_Pa"] if d["by_fuel"] else charge
            fresh = self.valve(gas, 0, 180, 0, 30, p0, manifold, True, total, out)
        else:
            self.shut(gas, 0, 180, 360, total, out, 0)
        if fires and fresh > 0:
            mixture = 1 if d["by_fuel"] else 1 + 1 / d["air_fuel"]  # air is drawn in, or mixture
            share = charge if d["by_fuel"] else 1
            fuel = share * d["heating"] / d["air_fuel"] * fresh / mixture
        V, T = self.volume(180)[0], gas["T"]
        p = gas["m"] * R * T / V
        begins = 360 + min(self.start, 0) if fuel else 360
        self.shut(gas, 180, begins, 360, total, out, 0)
        if fuel:  # the motored line: exponent of this compression so far
            now = self.volume(begins)[0]
            n = math.log(gas["m"] * R * gas["T"] / now / p) / math.log(V / now)
            gas["reference"] = (p, T, V, n)
        if begins < 360:
            self.shut(gas, begins, 360, 360, total, out, fuel)
        gas["fuel"] = fuel
        return fuel

    def down(self, gas, opens, total, out):
        """Expansion and exhaust."""
        fuel = gas.pop("fuel", 0.0)
        points = [a for a in (self.start, self.start + self.duration) if fuel and 0 < a < 140]
        points = [0] + points + [140]
        for a, b in zip(points, points[1:]):
            self.shut(gas, a, b, 0, total, out, fuel)
        p = gas["m"] * R * gas["T"] / self.volume(140)[0]
        for a, b in ((140, 180), (180, 360)):
            if opens:
                self.valve(gas, a, b, 140, 40, p, self.d["exhaust_Pa"], False, total, out)
            else:
                self.shut(gas, a, b, 0, total, out, fuel)


RESIDUAL, BURNT, AIR, OPEN = range(4)


def repeat(d, charge, factor=1.0, gas=None):
    """The first cylinder's settled repeat: energies in J, pressures of every degree by halves. What
    valves do: residual: exhaust after every fire, intake before every fire; burnt: no exhaust
    between a fire and a skip, but before a fire; air: exhaust after a fire, intake of the first
    skip, exhaust before a fire; open: always."""
    c, kind, word, n = Cylinder(d), d["trapped"], d["word"], int(d["cylinders"])
    length = len(word) // math.gcd(len(word), n)
    letter = [word[k * n % len(word)] for k in range(length)]
    share = [0 if x == "." else (1 if x == "x" else int(x) / 10) for x in letter]
    if gas is None:
        gas = {"m": 1.2e5 * c.small / (R * 1000), "T": 1000.0}
    settled = False
    for _ in range(60):
        before, total, fuel, pressure = (gas["m"], gas["T"]), [0.0] * 4, 0.0, []
        for k in range(length):
            fires, after, last = share[k] > 0, share[(k + 1) % length] > 0, share[k - 1] > 0
            intake = fires or kind == OPEN or (kind == AIR and last)
            if fires:
                exhaust = kind != BURNT or after
            else:
                exhaust = kind == OPEN or (kind in (BURNT, AIR) and after)
            up, down = ([0.0] * 360, [0.0] * 360) if settled else (None, None)
            own = charge * factor * (share[k] if fires else 1)
            fuel += c.up(gas, intake, fires, own, total, up)
            c.down(gas, exhaust, total, down)
            pressure += [up, down]
        if settled:
            return total, fuel, pressure, c
        settled = abs(gas["m"] / before[0] - 1) + abs(gas["T"] / before[1] - 1) < 2e-6
    raise SystemExit("no settled repeat")


worst = {}


def near(what, got, expected, allowed):
    part = abs(got - expected) / allowed
    worst[what] = max(worst.get(what, 0), part)
    if not part <= 1:
        raise SystemExit(f"{what}: {got:.9g}, here {expected:.9g}; {allowed:.2g} is allowed")


def check_cycles(d):
    total, fuel, pressure, _ = repeat(d, d["charge"], d["factor"])
    # the program takes one Runge-Kutta step of fourth order a degree
    near("unsettled", d["unsettled"], 0, 1e-11)
    for name, value in zip(("work_J", "wall_J", "exhaust_J", "rings_J"), total):
        near(name, d[name], value, 3e-5 * fuel)
    near("fuel_J", d["fuel_J"], fuel, 3e-5 * fuel)
    peak = max(max(p) for p in pressure)
    flat = [p for half in pressure for p in half]
    if len(flat) != len(d["pressure_Pa"]):
        raise SystemExit("pressures: another number of degrees")
    for a, b in zip(d["pressure_Pa"], flat):
        near("pressure_Pa", a, b, 3e-5 * peak)
    near("balance", sum(total), fuel, 1e-5 * fuel)


def parabola(p):
    k = max(range(len(p)), key=lambda i: p[i])
    slope, bend = (p[k + 1] - p[k - 1]) / 2, p[k + 1] - 2 * p[k] + p[k - 1]
    return p[k] - slope**2 / (2 * bend)


def torque(d, charge, gas):
    """An engine whose cylinders all see the same letters: brake and friction torque, N m, work over
    angle of each term of the balance, and the pressures."""
    total, fuel, pressure, c = repeat(d, charge, gas=gas)
    n, cycles, krpm = d["cylinders"], len(pressure) // 2, d["rpm"] / 1000
    per = n / (4 * math.pi * cycles)
    peaks = [parabola(pressure[k][180:] + pressure[k + 1][:180]) for k in range(0, 2 * cycles, 2)]
    fmep = d["fmep_constant"] + d["fmep_krpm"] * krpm + d["fmep_krpm2"] * krpm**2
    fmep += d["fmep_mpa_peak"] * sum(peaks) / cycles / 1e6
    friction = fmep * n * c.swept / (4 * math.pi)
    return total[0] * per - friction, friction, [x * per for x in total], fuel * per, max(peaks)


def check_duty(d):
    # all-fire: what the table's interpolation leaves; with skips also what its short memory does
    share = 1e-3 if "." in d["word"] else 1e-4
    c = Cylinder(d)
    gas = {"m": 1.2e5 * c.small / (R * 1000), "T": 1000.0}
    low, high = 0.98 * d["charge"], 1.02 * d["charge"]
    charge = brentq(lambda x: torque(d, x, gas)[0] - d["demand_Nm"], low, high, rtol=1e-6)
    brake, friction, total, fuel, peak = torque(d, charge, gas)
    near("brake", brake, d["demand_Nm"], 1e-4 * d["demand_Nm"])
    near("charge", d["charge"], charge, share * charge)
    near("friction_Nm", d["friction_Nm"], friction, share * friction)
    burnt = fuel * c.speed / d["heating"]
    near("fuel_kg_per_s", d["fuel_kg_per_s"], burnt, share * burnt)
    for name, value in zip(("wall_W", "exhaust_W", "rings_W"), total[1:]):
        near(name, d[name], value * c.speed, share * fuel * c.speed)
    near("gross_W", d["gross_W"] - d["pumping_W"], total[0] * c.speed, share * fuel * c.speed)
    near("peak_Pa", d["peak_Pa"], peak, 5 * share * peak)


def main():
    cases = json.loads(subprocess.run(sys.argv[1:], check=True, stdout=subprocess.PIPE).stdout)
    for d in cases:
        if d["kind"] == "cycles":
            check_cycles(d)
        else:
            check_duty(d)
    shares = {k: float(f"{v:.2g}") for k, v in worst.items()}
    print(len(cases), "cases; share of what is allowed:", shares)


main()
