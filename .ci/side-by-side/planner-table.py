"""Makes the table of .ci/side-by-side/planner from its lines: problem, solver, build [s], solve [s], iterations, objective, violation,
limits that bind. It fails when an objective differs from ours by more than a solver's own tolerance allows."""
import sys
from statistics import median

AGREE = {"lp": 1e-6, "qp": 1e-5}  # relative; interior methods stop at 1e-7 or 1e-8 of terms larger than the optimum

runs = {}
for line in open(sys.argv[1]):
    problem, solver, *numbers = line.split()
    runs.setdefault(problem, {}).setdefault(solver, []).append([float(v) for v in numbers])

print("| problem | solver | runs | build ms, median | solve ms, median (min-max) | build+solve ms, least | iterations | binding | violation | objective beside ours |")
print("|---|---|---|---|---|---|---|---|---|---|")
wrong, ratios = [], []
for problem, solvers in runs.items():
    total = {}
    ours = solvers.get("springbound")
    for solver, rows in solvers.items():
        build, solve, iterations, objective, violation, binding = zip(*rows)
        total[solver] = (min(b + s for b, s in zip(build, solve)), min(solve))
        off = (objective[0] - ours[0][3]) / abs(ours[0][3]) if ours else float("nan")
        if not abs(off) <= AGREE[problem[:2]]:
            wrong.append(f"{problem}: {solver} has the objective {objective[0]:.12g}")
        print(f"| {problem} | {solver} | {len(rows)} | {1e3 * median(build):.2f} | {1e3 * median(solve):.2f} ({1e3 * min(solve):.2f}-{1e3 * max(solve):.2f}) | "
              f"{1e3 * total[solver][0]:.2f} | {median(iterations):.0f} | {binding[0]:.0f} | {max(violation):.1g} | {off:+.1e} |")
    others = [s for s in total if s != "springbound"]
    if ours and others:
        both, alone = (min(others, key=lambda s: total[s][k]) for k in (0, 1))
        ratios.append(f"| {problem} | {total['springbound'][0] / total[both][0]:.3f} | {both} | {total['springbound'][1] / total[alone][1]:.3f} | {alone} |")
print()
print("| problem | build+solve: ours / fastest | fastest | solve only: ours / fastest | fastest |")
print("|---|---|---|---|---|")
print("\n".join(ratios))
if wrong:
    sys.exit("\n".join(["objectives differ:"] + wrong))
