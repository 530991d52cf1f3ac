#!/usr/bin/env python3
"""How the time of an exploration grows with the number of outputs.

    python3 tests/bench/growth.py [--out FOLDER] [--outputs 4,8,16,32,64] [--threads N] [--runs N]

The first n outputs of specs/sixty-four.yaml make a spec of their own. Its area limit is in
proportion to n; its overhead limit shrinks with the root of n, as few families serve few outputs,
but not below 25 uA. `biasloom explore` runs on each; the least user CPU time and the least wall
time of `--runs` runs count. The exponent is the slope of a straight line through the logarithms, by
least squares. Writes growth.json and growth.svg. Python's standard library only.
"""
import argparse
import json
import math
import os
import re
import resource
import subprocess
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
GOAL = 1.3


def spec_of(count, full):
    """specs/sixty-four.yaml with its first `count` outputs and limits to suit."""
    lines, kept, seen = full.splitlines(), [], 0
    for line in lines:
        if line.lstrip().startswith("- {"):
            seen += 1
            if seen > count:
                continue
        kept.append(line)
    assert seen >= count, f"the spec has {seen} outputs"
    share = count / seen

    def scaled(key, factor, least, text):
        def new(match):
            return f"{match[1]}{max(float(match[2]) * factor, least):g}{match[3]}"
        text, found = re.subn(rf"(?m)^(\s*{key}: )([0-9.]+)( u\w+)$", new, text)
        assert found == 1, f"one limit called {key}"
        return text

    text = "\n".join(kept) + "\n"
    text = scaled("area", share, 0.0, text)
    return scaled("overhead_current", math.sqrt(share), 25.0, text)


def timed(program, spec, threads, folder):
    """User CPU and wall time of an exploration, s, and how many networks its front has."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime
    start = time.perf_counter()
    done = subprocess.run([program, "explore", str(spec), "--quiet", "--threads", str(threads),
                           "--format", "json", "--out", f"{folder}/out"],
                          stdout=subprocess.DEVNULL)
    wall = time.perf_counter() - start
    user = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime - before
    front = json.loads(Path(folder, "out", "front.json").read_text())["front"]
    assert done.returncode in (0, 1), f"exploring ended with {done.returncode}"
    return user, wall, len(front)


def exponent(points):
    """Slope and intercept of ln(time) over ln(outputs)."""
    x, y = ([math.log(p[k]) for p in points] for k in (0, 1))
    mean_x, mean_y = sum(x) / len(x), sum(y) / len(y)
    slope = (sum((a - mean_x) * (b - mean_y) for a, b in zip(x, y))
             / sum((a - mean_x) ** 2 for a in x))
    return slope, mean_y - slope * mean_x


def plot(rows, slope, intercept, title):
    """User CPU time over outputs, both logarithmic, as SVG."""
    width, height, left, top, right, bottom = 520, 380, 70, 50, 20, 55
    fitted = [(n, math.exp(intercept + slope * math.log(n))) for n in (rows[0][0], rows[-1][0])]
    times = [r[1] for r in rows] + [t for _, t in fitted]
    first, last = math.floor(math.log10(min(times))), math.ceil(math.log10(max(times)))
    last = max(last, first + 1)
    low_n, high_n = math.log(rows[0][0] / 1.2), math.log(rows[-1][0] * 1.2)

    def x(n):
        return left + (math.log(n) - low_n) / (high_n - low_n) * (width - left - right)

    def y(t):
        return height - bottom - (math.log10(t) - first) / (last - first) * (height - top - bottom)

    def text(x, y, words, anchor="middle", more=""):
        return f'<text x="{x:.1f}" y="{y:.1f}" text-anchor="{anchor}"{more}>{words}</text>'

    parts = [f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {width} {height}" '
             'font-family="sans-serif" font-size="12">',
             f"<title>{title}</title>",
             f'<rect width="{width}" height="{height}" fill="white"/>',
             text(left, 24, title, "start", ' font-size="14"')]
    for decade in range(first, last + 1):
        at = y(10.0 ** decade)
        parts.append(f'<path d="M{left} {at:.1f}H{width - right}" stroke="#ccc"/>')
        parts.append(text(left - 8, at + 4, f"{10.0 ** decade:g}", "end"))
    for n, *_ in rows:
        parts.append(f'<path d="M{x(n):.1f} {top}V{height - bottom}" stroke="#eee"/>')
        parts.append(text(x(n), height - bottom + 18, str(n)))
    parts.append(text((left + width - right) / 2, height - 14, "outputs"))
    parts.append(text(18, (top + height - bottom) / 2, "user CPU time, s", "middle",
                      f' transform="rotate(-90 18 {(top + height - bottom) / 2:.1f})"'))
    line = " ".join(f"{'ML'[k]}{x(n):.1f} {y(t):.1f}" for k, (n, t) in enumerate(fitted))
    parts.append(f'<path d="{line}" stroke="#555" stroke-dasharray="5 4" fill="none"/>')
    for n, t, *_ in rows:
        parts.append(f'<circle cx="{x(n):.1f}" cy="{y(t):.1f}" r="4" fill="#0b5fa5"/>')
        parts.append(text(x(n), y(t) - 9, f"{t:.3g}"))
    return "\n".join(parts) + "\n</svg>\n"


def main():
    parser = argparse.ArgumentParser(description="Time of an exploration over outputs.")
    parser.add_argument("--out", type=Path, default=Path("target/growth"))
    parser.add_argument("--outputs", default="4,8,16,32,64")
    parser.add_argument("--threads", type=int, default=os.cpu_count())
    parser.add_argument("--runs", type=int, default=1)
    parser.add_argument("--program", help="a built biasloom; cargo builds one if left out")
    args = parser.parse_args()
    program = args.program
    if program is None:
        subprocess.run(["cargo", "build", "--release", "--quiet"], cwd=ROOT, check=True)
        program = ROOT / "target/release/biasloom"
    full = (ROOT / "specs/sixty-four.yaml").read_text()
    args.out.mkdir(parents=True, exist_ok=True)
    rows = []
    for count in map(int, args.outputs.split(",")):
        with tempfile.TemporaryDirectory() as folder:
            spec = Path(folder, f"outputs-{count}.yaml")
            spec.write_text(spec_of(count, full))
            runs = [timed(program, spec, args.threads, folder) for _ in range(args.runs)]
        user, wall, front = min(r[0] for r in runs), min(r[1] for r in runs), runs[0][2]
        rows.append((count, user, wall, front))
        print(f"{count:3} outputs: {user:7.2f} s user CPU, {wall:7.2f} s wall, "
              f"{front} networks on the front", flush=True)
    slope, intercept = exponent([(r[0], r[1]) for r in rows])
    by_wall, _ = exponent([(r[0], r[2]) for r in rows])
    print(f"exponent {slope:.2f} by user CPU, {by_wall:.2f} by wall; goal at most {GOAL}")
    title = f"Time grows with outputs to the power {slope:.2f}"
    (args.out / "growth.svg").write_text(plot(rows, slope, intercept, title))
    (args.out / "growth.json").write_text(json.dumps({
        "threads": args.threads, "exponent": slope, "exponent_by_wall": by_wall,
        "rows": [dict(zip(("outputs", "user_seconds", "wall_seconds", "front"), r))
                 for r in rows],
    }, indent=1) + "\n")


if __name__ == "__main__":
    main()
