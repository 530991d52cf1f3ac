#!/usr/bin/env python3
"""Our fronts against those of a general-purpose evolutionary library on the same evaluations.

    python3 tests/bench/library.py [SPEC ...] [--share 1.0] [--out FOLDER]

Needs numpy and pymoo 0.6.1.5 (`pip install pymoo==0.6.1.5`). For each spec (tern, starter,
low-voltage and nanoamp if none is named) `biasloom explore` runs once and its user CPU time is
taken. The library's NSGA-II (Deb, Pratap, Agarwal, Meyarivan, IEEE Trans. Evolutionary Computation
6, 2002) then gets 100 times that, times `--share`, on as many threads: its own time and that of
the evaluator, tests/bench/price.rs, which prices a network exactly as our search does. It restarts
with seeds 1, 2, ... whenever a run has stood still; nothing of ours is shown to it.

What is compared, in the plane of area and overhead current up to the spec's limits:
- its front on paper, where a network counts if it keeps every limit on paper;
- its front solved as whole circuits at every corner, as ours are; a limit exceeded by up to 0.2 %
  in all still counts, which our own polish would have to mend.
A JSON file per spec holds both fronts with the genes of every point; `--verify FILE` solves them
again.
"""
import argparse
import json
import os
import resource
import subprocess
import sys
import tempfile
from pathlib import Path

os.environ.setdefault("OMP_NUM_THREADS", "1")
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import numpy as np  # noqa: E402
from pymoo.algorithms.moo.nsga2 import NSGA2  # noqa: E402
from pymoo.core.crossover import Crossover  # noqa: E402
from pymoo.core.mutation import Mutation  # noqa: E402
from pymoo.core.problem import Problem  # noqa: E402
from pymoo.core.sampling import Sampling  # noqa: E402
from pymoo.operators.crossover.sbx import cross_sbx  # noqa: E402
from pymoo.operators.mutation.pm import mut_pm  # noqa: E402

ROOT = Path(__file__).resolve().parents[2]
SPECS = ["tern", "starter", "low-voltage", "nanoamp"]
TIMES = 100
NEARLY = 2e-3  # excess that our search leaves to its polish


def built(name, *wanted):
    """Path of the program `name`, which cargo builds, perhaps among others."""
    done = subprocess.run(["cargo", *wanted, "--message-format=json"], cwd=ROOT, check=True,
                          stdout=subprocess.PIPE, text=True)
    lines = map(json.loads, done.stdout.splitlines())
    return next(line["executable"] for line in lines
                if line.get("executable") and line["target"]["name"] == name)


def ours(spec, threads):
    """Points of our front, and the user CPU seconds they took."""
    program = built("biasloom", "build", "--release", "--bin", "biasloom")
    with tempfile.TemporaryDirectory() as folder:
        before = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime
        subprocess.run([program, "explore", str(spec), "--threads", str(threads), "--quiet",
                        "--format", "json", "--out", f"{folder}/out"],
                       check=True, stdout=subprocess.DEVNULL)
        seconds = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime - before
        front = json.loads(Path(folder, "out", "front.json").read_text())["front"]
    figures = [{f["name"]: f["value"] for f in network["figures"]} for network in front]
    return [[f["area"], f["overhead_current"]] for f in figures], seconds


class Evaluator:
    """tests/bench/price.rs, kept running."""

    def __init__(self, spec, threads, families):
        self.process = subprocess.Popen(
            [built("price", "bench", "--no-run", "--bench", "price"), str(spec),
             "--threads", str(threads), "--families", str(families)],
            stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)
        self.about = json.loads(self.process.stdout.readline())
        self.count = 0

    def price(self, networks, mode=""):
        lines = [f"{mode} " + " ".join(map(repr, row)) + "\n" for row in networks.tolist()]
        self.process.stdin.write("".join(lines) + "\n")
        self.process.stdin.flush()
        self.count += len(lines)
        answers = [self.process.stdout.readline().split() for _ in lines]
        return np.array(answers, dtype=float).reshape(-1, 3)

    def seconds(self):
        """User CPU seconds so far."""
        stat = Path(f"/proc/{self.process.pid}/stat").read_text().rsplit(")", 1)[1].split()
        return int(stat[11]) / os.sysconf("SC_CLK_TCK")

    def close(self):
        self.process.stdin.close()
        self.process.wait()


class Networks(Problem):
    """Area and overhead over their limits; one constraint, the sum of all excess."""

    def __init__(self, evaluator):
        genes = evaluator.about["genes"]
        self.evaluator = evaluator
        self.kinds = np.array([g["kind"] for g in genes])
        self.limits = limits_of(evaluator)
        super().__init__(n_var=len(genes), n_obj=2, n_ieq_constr=1,
                         xl=np.array([g["least"] for g in genes], dtype=float),
                         xu=np.array([g["most"] for g in genes], dtype=float))

    def _evaluate(self, x, out, *_, **__):
        answers = self.evaluator.price(x)
        out["F"] = answers[:, :2] / self.limits
        out["G"] = answers[:, 2:]


def limits_of(evaluator):
    """The reference point: the spec's own limits."""
    limits = evaluator.about["limits"]
    assert all(limits), "this comparison is for specs that limit area and overhead current"
    return np.array(limits)


def whole(problem, x):
    """Integers where they must be."""
    discrete = problem.kinds != "real"
    x[..., discrete] = np.round(x[..., discrete])
    return np.clip(x, problem.xl, problem.xu)


class Uniform(Sampling):
    """Evenly over every gene's range."""

    def _do(self, problem, n_samples, *_, **__):
        rng = np.random  # the library seeds it anew for every run
        x = problem.xl + rng.random((n_samples, problem.n_var)) * (problem.xu - problem.xl)
        choices = problem.kinds != "real"
        spread = problem.xu - problem.xl + 1
        even = np.floor(problem.xl + rng.random(x.shape) * spread)
        x[:, choices] = even[:, choices]
        return whole(problem, x)


class Exchange(Crossover):
    """Half the couples exchange whole families and single outputs; the others blend real and whole
    genes (simulated binary crossover) and exchange choices one by one."""

    def __init__(self, about):
        super().__init__(2, 2, prob=0.9)
        self.block = np.arange(len(about["genes"]))
        families = about["families"] * about["per_family"]
        self.block[:families] //= about["per_family"]

    def _do(self, problem, x, *_, **__):
        rng = np.random
        _, couples, genes = x.shape
        blended = cross_sbx(x.astype(float), problem.xl, problem.xu,
                            np.full((couples, 1), 15.0), np.full((couples, 1), 0.5),
                            np.full((couples, 1), 0.5))
        choice = problem.kinds == "choice"
        swapped = x[::-1]
        one_by_one = rng.random((couples, genes)) < 0.5
        blended = np.where(choice & one_by_one, swapped, np.where(choice, x, blended))
        by_block = rng.random((couples, self.block.max() + 1)) < 0.5
        blocks = np.where(by_block[:, self.block], swapped, x)
        blocky = rng.random((couples, 1)) < 0.5
        return whole(problem, np.where(blocky, blocks, blended))


class Change(Mutation):
    """Polynomial mutation of reals, a step up or down of whole numbers, a new draw of choices."""

    def _do(self, problem, x, *_, **__):
        rng = np.random
        rate = 2.0 / problem.n_var
        count = len(x)
        reals = mut_pm(x.astype(float), problem.xl, problem.xu, np.full(count, 20.0),
                       np.full(count, rate), at_least_once=False)
        hit = rng.random(x.shape) < rate
        step = rng.geometric(0.5, x.shape) * rng.choice([-1, 1], x.shape)
        drawn = np.floor(problem.xl + rng.random(x.shape) * (problem.xu - problem.xl + 1))
        stepped = np.where(hit, x + step, x)
        redrawn = np.where(hit, drawn, x)
        kinds = problem.kinds
        return whole(problem, np.where(kinds == "real", reals,
                                       np.where(kinds == "whole", stepped, redrawn)))


def nondominated(points):
    """Indices of the points no other dominates, rising in the first component."""
    kept, least = [], np.inf
    for i in sorted(range(len(points)), key=lambda i: tuple(points[i])):
        if points[i][1] < least:
            kept.append(i)
            least = points[i][1]
    return kept


def hypervolume(points, limits):
    """Share of the box up to the limits that the points dominate."""
    inside = [np.asarray(p) / limits for p in points if (np.asarray(p) < limits).all()]
    kept = [inside[i] for i in nondominated(inside)]
    ends = [p[0] for p in kept[1:]] + [1.0]
    return float(sum((end - p[0]) * (1.0 - p[1]) for p, end in zip(kept, ends)))


class Archive:
    """The non-dominated networks of all that kept every limit on paper."""

    def __init__(self, genes):
        self.points, self.genes = np.empty((0, 2)), np.empty((0, genes))

    def add(self, points, genes):
        self.points = np.vstack([self.points, points])
        self.genes = np.vstack([self.genes, genes])
        kept = nondominated(self.points.tolist())
        self.points, self.genes = self.points[kept], self.genes[kept]


def run_library(evaluator, budget, population, patience, say):
    """All that the library finds within its budget of user CPU seconds."""
    problem = Networks(evaluator)
    own = resource.getrusage(resource.RUSAGE_SELF).ru_utime
    already = evaluator.seconds()
    unit = np.ones(2)

    def spent():
        used = resource.getrusage(resource.RUSAGE_SELF).ru_utime - own
        return used + evaluator.seconds() - already

    found, seeds = Archive(problem.n_var), 0
    while spent() < budget:
        seeds += 1
        algorithm = NSGA2(pop_size=population, sampling=Uniform(),
                          crossover=Exchange(evaluator.about),
                          mutation=Change(prob=1.0), eliminate_duplicates=True)
        algorithm.setup(problem, seed=seeds, termination=("n_gen", 10**9), verbose=False)
        best, since, generation = (np.inf, 0.0), 0, 0
        own_front = Archive(problem.n_var)
        while spent() < budget and since < patience:
            algorithm.next()
            generation += 1
            x, f, g = algorithm.off.get("X", "F", "G") if algorithm.off is not None \
                else algorithm.pop.get("X", "F", "G")
            good = g[:, 0] <= 0.0
            if good.any():
                own_front.add(f[good], x[good])
            # First the least violation counts, then the volume.
            now = (max(0.0, float(algorithm.pop.get("CV").min())),
                   hypervolume(own_front.points.tolist(), unit))
            if now[0] < best[0] * 0.999 or now[1] > best[1] + 1e-5:
                best, since = (min(now[0], best[0]), max(now[1], best[1])), 0
            else:
                since += 1
        found.add(own_front.points, own_front.genes)
        say(f"  seed {seeds}: {generation} generations, hypervolume {best[1]:.5f}, least excess "
            f"{best[0]:.3g}; {spent():.0f} of {budget:.0f} s")
    return found, {"seconds": spent(), "seeds": seeds, "evaluations": evaluator.count}


def dominating(theirs, mine):
    """Pairs of one of theirs that is at least as good as one of ours in both and better in one."""
    return [(t, m) for t in theirs for m in mine
            if t[0] <= m[0] and t[1] <= m[1] and (t[0] < m[0] or t[1] < m[1])]


def compare(spec, args, say):
    name = spec.stem
    mine, seconds = ours(spec, args.threads)
    budget = TIMES * args.share * seconds
    say(f"{name}: ours took {seconds:.2f} s of user CPU; the library gets {budget:.1f} s")
    evaluator = Evaluator(spec, args.threads, args.families)
    found, cost = run_library(evaluator, budget, args.population, args.patience, say)
    limits = limits_of(evaluator)
    paper = (found.points * limits).tolist()
    solved = evaluator.price(found.genes, "whole").tolist() if len(paper) else []
    evaluator.close()
    kept = [p[:2] for p in solved if p[2] <= NEARLY]
    result = {
        "spec": name, "limits": limits.tolist(), "share": args.share, "threads": args.threads,
        "ours": {"seconds": seconds, "points": mine, "hypervolume": hypervolume(mine, limits)},
        "library": {
            **cost, "families": args.families, "population": args.population,
            "hypervolume_on_paper": hypervolume(paper, limits),
            "hypervolume_whole": hypervolume(kept, limits),
            "dominating_on_paper": dominating(paper, mine),
            "dominating_whole": dominating(kept, mine),
            "front": [{"paper": p, "whole": w, "genes": g}
                      for p, w, g in zip(paper, solved, found.genes.tolist())],
        },
    }
    theirs = result["library"]
    say(f"  {cost['evaluations']} networks in {cost['seconds']:.0f} s, {cost['seeds']} seeds")
    say(f"  hypervolume: ours {result['ours']['hypervolume']:.5f}, library on paper "
        f"{theirs['hypervolume_on_paper']:.5f}, solved whole {theirs['hypervolume_whole']:.5f}")
    say(f"  points that dominate one of ours: on paper {len(theirs['dominating_on_paper'])}, "
        f"solved whole {len(theirs['dominating_whole'])}")
    for t, m in theirs["dominating_whole"]:
        say(f"    {t[0] * 1e12:.1f} um2 {t[1] * 1e6:.3f} uA against "
            f"{m[0] * 1e12:.1f} um2 {m[1] * 1e6:.3f} uA")
    (args.out / f"{name}.json").write_text(json.dumps(result, indent=1) + "\n")
    ahead = result["ours"]["hypervolume"] >= max(theirs["hypervolume_on_paper"],
                                                 theirs["hypervolume_whole"])
    return ahead and not theirs["dominating_whole"]


def verify(path, say):
    """Prices and solves a saved front again."""
    saved = json.loads(path.read_text())
    evaluator = Evaluator(ROOT / "specs" / f"{saved['spec']}.yaml", saved["threads"],
                          saved["library"]["families"])
    front = saved["library"]["front"]
    genes = np.array([p["genes"] for p in front])
    paper, solved = evaluator.price(genes), evaluator.price(genes, "whole")
    evaluator.close()
    worst = max(np.max(np.abs(paper[:, :2] / [p["paper"] for p in front] - 1.0)),
                np.max(np.abs(solved[:, :2] / np.array([p["whole"] for p in front])[:, :2] - 1.0)))
    say(f"{saved['spec']}: {len(front)} networks, at most {worst:.1e} from what was saved")
    return worst < 1e-6


def main():
    parser = argparse.ArgumentParser(description="Our fronts against an evolutionary library's.")
    parser.add_argument("specs", nargs="*", default=SPECS)
    parser.add_argument("--share", type=float, default=1.0, help="of 100 times our time")
    parser.add_argument("--threads", type=int, default=os.cpu_count())
    parser.add_argument("--families", type=int, default=6, help="most families on a rail")
    parser.add_argument("--population", type=int, default=300)
    parser.add_argument("--patience", type=int, default=400, help="generations without a gain")
    parser.add_argument("--out", type=Path, default=Path("target/library"))
    parser.add_argument("--verify", type=Path, help="a saved file")
    args = parser.parse_args()

    def say(text):
        print(text, flush=True)

    if args.verify:
        sys.exit(0 if verify(args.verify, say) else 1)
    args.out.mkdir(parents=True, exist_ok=True)
    fine = [compare(ROOT / "specs" / f"{name}.yaml", args, say) for name in args.specs]
    sys.exit(0 if all(fine) else 1)


if __name__ == "__main__":
    main()
