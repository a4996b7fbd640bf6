"""Runs compact box problems side by side: ours, and what one would write instead.

    python3 tests/benches/peers.py PROBLEMS.json [--program PATH] [--limit SECONDS] [--only ID ...]

PROBLEMS.json holds `{"finite": [{"id", "f", "box"}, ..]}`: `f >= 0` on the box, `**` is
power, ends are rational. The two scripts to compare with are the ones a user would
write in an hour: adaptive bisection at 53 bits with the natural extension, then the
mean value form with derivatives by sympy, once on the balls of python-flint and once on
the intervals of mpmath. Ours is `check` with one thread on a dossier that makes the
same claim; start of the program, certificate and kernel are included, while the
scripts' imports are not. All times are CPU seconds, so a busy machine disturbs little.

Needs python-flint, mpmath, gmpy2 and sympy. Build ours first: `cargo build --release`.
"""

import argparse
import json
import math
import os
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import flint
import mpmath
import sympy
from sympy.printing.str import StrPrinter

PRECISION = 53


class Balls:
    """Balls of python-flint."""

    name = "balls"
    functions = {f: getattr(flint.arb, f) for f in ["sin", "cos", "tan", "exp", "log", "sqrt", "cosh", "sinh"]}

    def __init__(self):
        flint.ctx.prec = PRECISION

    def rational(self, p, q):
        return flint.arb(flint.fmpq(p, q))

    def hull(self, a, b):
        return a.union(b)

    def middle(self, x):
        return flint.arb(x.mid())

    def width(self, x):
        return float(x.rad())


class Intervals:
    """Intervals of mpmath."""

    name = "intervals"

    def __init__(self):
        iv = mpmath.iv
        iv.prec = PRECISION
        named = {"sin": iv.sin, "cos": iv.cos, "exp": iv.exp, "log": iv.log, "sqrt": iv.sqrt}
        named["tan"] = lambda x: iv.sin(x) / iv.cos(x)
        named["cosh"] = lambda x: (iv.exp(x) + iv.exp(-x)) / 2
        named["sinh"] = lambda x: (iv.exp(x) - iv.exp(-x)) / 2
        self.functions = named

    def rational(self, p, q):
        return mpmath.iv.mpf(p) / q

    def hull(self, a, b):
        return mpmath.iv.mpf([a.a, b.b])

    def middle(self, x):
        return mpmath.iv.mpf(mpmath.mpf(x.mid))

    def width(self, x):
        return float(mpmath.mpf(x.delta))


class Source(StrPrinter):
    """Python source in which every number is an exact literal of the arithmetic."""

    def _print_Integer(self, number):
        return f"number({number.p}, 1)"

    def _print_Rational(self, number):
        return f"number({number.p}, {number.q})"

    def _print_Pow(self, power, rational=False):
        base, exponent = power.as_base_exp()
        base = self._print(base)
        if exponent.is_Integer:
            positive = f"({base})**{abs(exponent.p)}"
            return positive if exponent.p > 0 else f"(number(1, 1)/({positive}))"
        if abs(exponent) == sympy.Rational(1, 2):
            return f"sqrt({base})" if exponent > 0 else f"(number(1, 1)/sqrt({base}))"
        return f"exp(({self._print(exponent)})*log({base}))"


def compiled(term, names, kit):
    scope = dict(kit.functions, number=kit.rational)
    return eval(f"lambda {', '.join(names)}: {Source().doprint(term)}", scope)


def bisect(problem, kit, limit):
    """Proves `f >= 0` on the box; gives the outcome, the boxes and the CPU seconds."""
    start = time.process_time()
    names = list(problem["box"])
    symbols = {name: sympy.Symbol(name) for name in names}
    term = sympy.sympify(problem["f"], locals=symbols, rational=True)
    value = compiled(term, names, kit)
    slopes = [compiled(sympy.diff(term, symbols[name]), names, kit) for name in names]

    def end(text):
        q = sympy.Rational(text)
        return kit.rational(int(q.p), int(q.q))

    waiting = [[(end(a), end(b)) for a, b in problem["box"].values()]]
    boxes = 0
    while waiting:
        box = waiting.pop()
        boxes += 1
        if time.process_time() - start > limit:
            return "out of time", boxes, time.process_time() - start
        ranges = [kit.hull(a, b) for a, b in box]
        if value(*ranges) >= 0:
            continue
        centre = [kit.middle(x) for x in ranges]
        mean = value(*centre)
        for slope, x, c in zip(slopes, ranges, centre):
            mean += slope(*ranges) * (x - c)
        if mean >= 0:
            continue
        widest = max(range(len(box)), key=lambda k: kit.width(ranges[k]))
        (a, b), c = box[widest], centre[widest]
        if not a < c < b:
            return "stuck", boxes, time.process_time() - start
        waiting.append(box[:widest] + [(a, c)] + box[widest + 1 :])
        waiting.append(box[:widest] + [(c, b)] + box[widest + 1 :])
    return "proved", boxes, time.process_time() - start


def ours(problem, program):
    """The verdict and the CPU seconds of a whole run."""
    lines = ['dossier "Problem"']
    lines += [f"parameter {name} : real in [{a}, {b}]" for name, (a, b) in problem["box"].items()]
    lines += [f"claim top: {problem['f'].replace('**', '^')} >= 0", ""]
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder, "a.obl")
        path.write_text("\n".join(lines))
        Path(folder, "boundwright.toml").touch()
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        command = [program, "check", str(path), "--jobs", "1", "--format", "json"]
        run = subprocess.run(command, capture_output=True, text=True)
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
    seconds = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    if run.returncode not in (0, 1, 2):
        return f"code {run.returncode}", seconds
    return json.loads(run.stdout)["obligations"][0]["verdict"], seconds


def geometric_mean(ratios):
    return math.exp(sum(map(math.log, ratios)) / len(ratios)) if ratios else float("nan")


def main():
    arguments = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    arguments.add_argument("problems", type=Path)
    root = Path(__file__).resolve().parents[2]
    arguments.add_argument("--program", default=str(root / "target" / "release" / "boundwright"))
    arguments.add_argument("--limit", type=float, default=45, help="CPU seconds for each script")
    arguments.add_argument("--only", nargs="*", default=[])
    given = arguments.parse_args()
    if not os.access(given.program, os.X_OK):
        sys.exit(f"{given.program} is not there: build it, or name it with --program")
    problems = json.loads(given.problems.read_text())["finite"]
    kits = [Balls(), Intervals()]
    print("problem\tours\tseconds\t" + "\t".join(f"{k.name}\tboxes\tseconds\tratio" for k in kits))
    ratios = {kit.name: {"large": [], "small": []} for kit in kits}
    totals = {"ours": 0.0, "balls": 0.0, "intervals": 0.0}
    for problem in problems:
        if given.only and problem["id"] not in given.only:
            continue
        verdict, seconds = ours(problem, given.program)
        cells = [problem["id"], verdict, f"{seconds:.4f}"]
        size = None
        for kit in kits:
            outcome, boxes, spent = bisect(problem, kit, given.limit)
            size = size or ("large" if boxes >= 1000 else "small")
            # A script that did not finish has spent at least this much.
            if verdict == "holds":
                ratios[kit.name][size].append(spent / seconds)
            if size == "small":
                totals[kit.name] += spent
            cells += [outcome, str(boxes), f"{spent:.4f}", f"{spent / seconds:.1f}"]
        if size == "small":
            totals["ours"] += seconds
        print("\t".join(cells), flush=True)
    for kit in kits:
        found = ratios[kit.name]
        print(
            f"{kit.name}: geometric mean of the ratios {geometric_mean(found['large']):.1f} where their boxes are"
            f" 1000 or more ({len(found['large'])} problems), {geometric_mean(found['small']):.1f} elsewhere"
        )
    print("small problems in total: " + ", ".join(f"{name} {seconds:.3f} s" for name, seconds in totals.items()))


if __name__ == "__main__":
    main()
