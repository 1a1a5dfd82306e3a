"""Times HiGHS (as packed in scipy) and cvxopt on a planning problem (format: plan/convex/sidebyside_test.go).

Usage: planner.py FILE highs-ds|highs-ipm|cvxopt-dense|cvxopt-structured
One line a repetition: time to build and to solve [s], iterations, objective, largest violation of a limit, limits that bind.
HiGHS is called below scipy's own checks, with column-wise arrays that are made beforehand; it takes them over and solves in one
call, so that its building counts as solving. cvxopt's matrices are made as building.
"""
import sys
import time

import numpy as np

INFINITY = 1e30


def now():
    return time.perf_counter(), time.process_time()


def since(a, b):
    """Short times are elapsed ones, since the processor's clock may be coarse; long ones are processor time."""
    elapsed = b[0] - a[0]
    return elapsed if elapsed < 0.05 else b[1] - a[1]


def read(name):
    with open(name, "rb") as f:
        n, m, curved = np.fromfile(f, "<i8", 3)
        take = lambda k: np.fromfile(f, "<f8", k)
        p = dict(n=int(n), m=int(m), cost=take(n), upper=take(n), h=take(n), limits=take(m))
        p["a"] = take(n * m).reshape(m, n)
        p["demand"] = take(1)[0]
    return p


def highs(p, solver):
    from scipy.optimize._highs._highs_wrapper import _highs_wrapper
    from scipy.optimize._highs._highs_constants import (
        HIGHS_OBJECTIVE_SENSE_MINIMIZE, HIGHS_SIMPLEX_CRASH_STRATEGY_OFF, HIGHS_SIMPLEX_STRATEGY_DUAL, MESSAGE_LEVEL_NONE)
    n, m = p["n"], p["m"]
    data = np.ascontiguousarray(p["a"].T).ravel()
    index = np.tile(np.arange(m, dtype=np.int32), n)
    start = np.arange(0, n * m + 1, m, dtype=np.int32)
    low, zero = np.full(m, -INFINITY), np.zeros(n)
    options = dict(presolve=True, sense=HIGHS_OBJECTIVE_SENSE_MINIMIZE, solver="ipm" if solver == "highs-ipm" else "simplex",
                   highs_debug_level=MESSAGE_LEVEL_NONE, log_to_console=False, output_flag=False,
                   simplex_strategy=HIGHS_SIMPLEX_STRATEGY_DUAL, simplex_crash_strategy=HIGHS_SIMPLEX_CRASH_STRATEGY_OFF,
                   time_limit=None, ipm_iteration_limit=None, simplex_iteration_limit=None, mip_max_nodes=None, mip_rel_gap=None,
                   dual_feasibility_tolerance=None, primal_feasibility_tolerance=None, ipm_optimality_tolerance=None,
                   simplex_dual_edge_weight_strategy=None)

    def once():
        t = now()
        r = _highs_wrapper(p["cost"], start, index, data, low, p["limits"], zero, p["upper"], np.empty(0, dtype=np.uint8), options)
        t = since(t, now())
        return 0.0, t, r.get("simplex_nit", 0) or r.get("ipm_nit", 0), np.array(r["x"])

    return once


def cvx(p, solver):
    from cvxopt import blas, lapack, matrix, mul, solvers
    solvers.options["show_progress"] = False
    if solver == "cvxopt-structured":
        solvers.options["refinement"] = 1  # without it the last digits of the reduced system keep it from ending
    n, m = p["n"], p["m"]
    a, c = matrix(p["a"]), matrix(p["cost"])
    rows = m + 1

    def dense():
        t0 = now()
        g = matrix(0.0, (rows + 2 * n, n))
        g[:m, :] = a
        g[m, :] = -1.0
        g[rows:rows + n, :] = matrix(np.eye(n))
        g[rows + n:, :] = matrix(-np.eye(n))
        b = matrix(np.concatenate((p["limits"], [-p["demand"]], p["upper"], np.zeros(n))))
        h = matrix(np.diag(p["h"]))
        t1 = now()
        r = solvers.qp(h, c, g, b)
        return since(t0, t1), since(t1, now()), r["iterations"], np.array(r["x"]).ravel()

    def structured():
        # Bounds and Hessian are diagonal, so that each step needs only the factor of a matrix as large as the limits (Woodbury).
        t0 = now()
        g = matrix(0.0, (rows, n))
        g[:m, :] = a
        g[m, :] = -1.0
        h, plain = matrix(p["h"]), np.array(g)
        b = matrix(np.concatenate((p["limits"], [-p["demand"]], p["upper"], np.zeros(n))))

        def times_h(x, y, alpha=1.0, beta=0.0):
            blas.scal(beta, y)
            y += alpha * mul(h, x)

        def times_g(x, y, alpha=1.0, beta=0.0, trans="N"):
            blas.scal(beta, y)
            if trans == "N":
                t = matrix(0.0, (rows, 1))
                blas.gemv(g, x, t)
                y[:rows] += alpha * t
                y[rows:rows + n] += alpha * x
                y[rows + n:] -= alpha * x
            else:
                t = matrix(0.0, (n, 1))
                blas.gemv(g, matrix(x[:rows]), t, trans="T")
                y += alpha * (t + x[rows:rows + n] - x[rows + n:])

        def system(w):
            d = w["di"] ** 2
            inverse = matrix(1.0 / np.array(h + d[rows:rows + n] + d[rows + n:]))
            scaled = matrix(plain * np.sqrt(np.array(inverse)).reshape(1, n))
            small = matrix(0.0, (rows, rows))
            small[::rows + 1] = matrix(1.0 / np.array(d[:rows]))
            blas.syrk(scaled, small, beta=1.0)
            lapack.potrf(small)

            def solve(x, y, z):
                t = mul(d, z)
                r = matrix(x)
                u = matrix(0.0, (n, 1))
                blas.gemv(g, matrix(t[:rows]), u, trans="T")
                r += u + t[rows:rows + n] - t[rows + n:]
                v = mul(inverse, r)
                s = matrix(0.0, (rows, 1))
                blas.gemv(g, v, s)
                lapack.potrs(small, s)
                blas.gemv(g, s, u, trans="T")
                x[:] = v - mul(inverse, u)
                blas.gemv(g, x, s)
                z[:rows] = mul(matrix(w["di"][:rows]), s - z[:rows])
                z[rows:rows + n] = mul(matrix(w["di"][rows:rows + n]), x - z[rows:rows + n])
                z[rows + n:] = mul(matrix(w["di"][rows + n:]), -x - z[rows + n:])

            return solve

        t1 = now()
        r = solvers.coneqp(times_h, c, times_g, b, dims={"l": rows + 2 * n, "q": [], "s": []}, kktsolver=system,
                           xnewcopy=matrix, xdot=blas.dot, xaxpy=blas.axpy, xscal=blas.scal)
        return since(t0, t1), since(t1, now()), r["iterations"], np.array(r["x"]).ravel()

    return dense if solver == "cvxopt-dense" else structured


def main():
    p, solver = read(sys.argv[1]), sys.argv[2]
    once = highs(p, solver) if solver.startswith("highs") else cvx(p, solver)
    begin, k = time.perf_counter(), 0
    slow = False
    while k <= 25 and (k <= 3 or time.perf_counter() - begin < 1) and not slow:
        build, solve, iterations, x = once()
        slow = build + solve > 3  # one run must do
        k += 1
        if k == 1 and not slow:
            continue  # the first warms up
        value = p["a"] @ x
        worst = max((value - p["limits"]).max(), p["demand"] - x.sum() if p["h"].any() else 0, (x - p["upper"]).max(), (-x).max(), 0)
        binding = (value > p["limits"] * (1 - 1e-7)).sum()
        objective = p["cost"] @ x + 0.5 * (p["h"] * x) @ x
        print(f"run {solver} {build:.9f} {solve:.9f} {iterations} {objective:.15g} {worst:.3g} {binding}", flush=True)


main()
