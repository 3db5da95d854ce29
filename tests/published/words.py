"""usage: words.py TACET   words a second time: what `tacet patterns --json` says against counting
by hand and numpy's transform."""
import itertools
import json
import math
import subprocess
import sys
from fractions import Fraction

import numpy as np


def ask(*arguments):
    call = [sys.argv[1], "patterns", *arguments, "--json"]
    return json.loads(subprocess.run(call, check=True, stdout=subprocess.PIPE).stdout)["patterns"]


def same(what, got, expected):
    if got != expected:
        raise SystemExit(f"{what}: {got}, here {expected}")


def reduced(word):
    return next(word[:d] for d in range(1, len(word) + 1) if word[:d] * (len(word) // d) == word)


def near(what, got, expected):
    if not abs(got - expected) <= 1e-12:
        raise SystemExit(f"{what}: {got}, here {expected}")


def history(word, cylinders):
    """Letters that each cylinder meets until all of it repeats: opportunities dealt one by one."""
    w, seen, i = reduced(word), [""] * cylinders, 0
    while i == 0 or i % cylinders or i % len(w):
        seen[i % cylinders] += w[i % len(w)]
        i += 1
    return seen, i


def skip_run(letters):
    if set(letters) == {"."}:
        return 0  # never fires: no run
    twice = "".join("." if c == "." else "x" for c in letters * 2)
    return max(map(len, twice.split("x")))


def placements(word, cylinders):
    """Rotations whose histories are not those of another one some whole working cycles later."""
    w, found = reduced(word), set()
    for by in range(len(w)):
        seen, n = history(w[by:] + w[:by], cylinders)
        cycles = n // cylinders
        found.add(min(tuple(s[k:] + s[:k] for s in seen) for k in range(cycles)))
    return len(found)


def check(p, word, cylinders, strokes):
    seen, n = history(word, cylinders)
    same("word", p["word"], reduced(word))
    same("opportunities", p["opportunities"], n)
    same("revolutions", p["revolutions"], n // cylinders * strokes // 2)
    same("fires", p["fires_per_cylinder"], [sum(c != "." for c in s) for s in seen])
    same("run", p["longest_skip_run"], max(map(skip_run, seen)))
    same("placements", p["placements"], placements(word, cylinders))
    fires = sum(c != "." for c in reduced(word))
    density = Fraction(fires, len(reduced(word)))
    same("density", p["density"], str(density))
    near("leading order", p["leading_order"], float(density) * cylinders * 2 / strokes)
    near("repeat order", p["repeat_order"], 2 * cylinders / (strokes * n))
    value = [0 if c == "." else 1 if c == "x" else int(c) / 10 for c in reduced(word)]
    y = np.fft.fft(value)
    same("lines", len(p["spectrum"]), len(value) - 1)
    for m, (order, amplitude, phase) in enumerate(p["spectrum"], 1):
        line = amplitude * abs(y[0]) * np.exp(1j * math.radians(phase))
        near("order", order, 2 * m * cylinders / (strokes * len(value)))
        near(f"line {m} of {word}", line, y[m])


def all_necklaces(fires, length, longest):
    """Least rotations of every word there is ('.' before 'x', as the program lists them)."""
    found = set()
    for where in itertools.combinations(range(length), fires):
        w = "".join("x" if i in where else "." for i in range(length))
        if longest and max(map(len, (w * 2).split("x"))) > longest:
            continue
        found.add(min(w[i:] + w[:i] for i in range(length)))
    return sorted(reduced(w) for w in found)


def accumulator(fires, length):
    """The even word: fires when it is full."""
    even, full = "", 0
    for _ in range(length):
        full += fires
        even += "x" if full >= length else "."
        full %= length
    return even


words = 0
for word, cylinders, strokes in (
    ("x", 6, 4), ("x.", 6, 4), ("x.x.", 4, 2), ("..x.x.x", 6, 4), ("x5..9", 8, 4),
    ("x" + "." * 20 + "3", 5, 4), (".1.1x.", 4, 4), ("xx.x", 1, 4), ("x...x..", 12, 2),
    ("x.." * 21 + "9", 6, 4),
):
    got = ask(word, "--cylinders", str(cylinders), "--strokes", str(strokes))
    check(got[0], word, cylinders, strokes)
    words += 1
for fires, length, longest, cylinders in ((3, 7, 0, 6), (4, 10, 0, 8), (5, 12, 3, 6), (6, 9, 1, 4)):
    got = ask(f"{fires}/{length}", "--cylinders", str(cylinders),
              "--maker", "necklaces", "--longest-run", str(longest))
    k = Fraction(fires, length)
    expected = all_necklaces(k.numerator, k.denominator, longest)
    same("necklaces", sorted(p["word"] for p in got), expected)
    for p in got:
        check(p, p["word"], cylinders, 4)
        words += 1
for length in (2, 4, 7, 9, 14, 17):
    for fires in range(1, length + 1):
        if math.gcd(fires, length) == 1:
            check(ask(f"{fires}/{length}", "--cylinders", "6")[0], accumulator(fires, length), 6, 4)
            words += 1
print(words, "words alike")
