// Times Clp and GLPK on a planning problem (format: plan/convex/sidebyside_test.go). Usage: planner-lp FILE clp-dual|clp-initial|glpk-primal|glpk-dual
// One line a repetition: time to build and to solve [s], iterations, objective, largest violation of a limit, limits that bind.
// The column-wise arrays that both libraries take are made beforehand and are not counted.
#include <coin/ClpSimplex.hpp>
#include <coin/ClpSolve.hpp>
#include <glpk.h>
#include <time.h>
#include <cmath>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <string>
#include <vector>

struct Clock {
	double elapsed, processor;
};

static double seconds(clockid_t c) {
	timespec t;
	clock_gettime(c, &t);
	return t.tv_sec + 1e-9 * t.tv_nsec;
}

static Clock now() { return Clock{seconds(CLOCK_MONOTONIC), seconds(CLOCK_PROCESS_CPUTIME_ID)}; }

// Short times are elapsed ones, since the processor's clock may be coarse; long ones are processor time, which others' work disturbs less.
static double since(Clock a, Clock b) {
	double e = b.elapsed - a.elapsed;
	return e < 0.05 ? e : b.processor - a.processor;
}

struct Problem {
	int64_t n, m, curved;
	std::vector<double> cost, upper, h, limits, a;
};

static std::vector<double> take(FILE *f, size_t k) {
	std::vector<double> v(k);
	if (fread(v.data(), 8, k, f) != k) { fprintf(stderr, "the file is too short\n"); exit(1); }
	return v;
}

int main(int argc, char **argv) {
	if (argc != 3) return 2;
	FILE *f = fopen(argv[1], "rb");
	Problem p;
	if (!f || fread(&p.n, 8, 1, f) != 1 || fread(&p.m, 8, 1, f) != 1 || fread(&p.curved, 8, 1, f) != 1) return 1;
	int n = p.n, m = p.m;
	p.cost = take(f, n), p.upper = take(f, n), p.h = take(f, n), p.limits = take(f, m), p.a = take(f, (size_t)n * m);
	std::string solver = argv[2];
	bool clp = solver.substr(0, 3) == "clp";

	std::vector<double> value((size_t)n * m + 1), zero(n, 0.0), low(m, -COIN_DBL_MAX);
	std::vector<int> index((size_t)n * m + 1), index1(m + 1), col(n + 1);
	std::vector<CoinBigIndex> start(n + 1);
	for (int j = 0; j < n; j++) {
		start[j] = (CoinBigIndex)j * m;
		for (int i = 0; i < m; i++) {
			value[(size_t)j * m + i] = p.a[(size_t)i * n + j];
			index[(size_t)j * m + i] = i;
		}
	}
	start[n] = (CoinBigIndex)n * m;
	for (int i = 0; i <= m; i++) index1[i] = i;
	glp_term_out(GLP_OFF);

	double begin = now().elapsed;
	bool slow = false;
	for (int k = 0; k <= 25 && (k <= 3 || now().elapsed - begin < 1) && !slow; k++) {
		Clock t0 = now(), t1, t2;
		double objective;
		int iterations = 0, status;
		std::vector<double> x(n);
		if (clp) {
			ClpSimplex s;
			s.setLogLevel(0);
			s.loadProblem(n, m, start.data(), index.data(), value.data(), zero.data(), p.upper.data(), p.cost.data(), low.data(), p.limits.data());
			t1 = now();
			if (solver == "clp-dual") s.dual();
			else {
				ClpSolve how;
				how.setSolveType(ClpSolve::useDual);
				s.initialSolve(how);
			}
			t2 = now();
			status = s.status();
			iterations = s.numberIterations();
			objective = s.objectiveValue();
			for (int j = 0; j < n; j++) x[j] = s.primalColumnSolution()[j];
		} else {
			glp_prob *g = glp_create_prob();
			glp_add_rows(g, m);
			glp_add_cols(g, n);
			for (int i = 0; i < m; i++) glp_set_row_bnds(g, i + 1, GLP_UP, 0, p.limits[i]);
			for (int j = 0; j < n; j++) {
				glp_set_col_bnds(g, j + 1, GLP_DB, 0, p.upper[j]);
				glp_set_obj_coef(g, j + 1, p.cost[j]);
				glp_set_mat_col(g, j + 1, m, index1.data(), value.data() + (size_t)j * m - 1);
			}
			t1 = now();
			glp_smcp how;
			glp_init_smcp(&how);
			how.msg_lev = GLP_MSG_OFF;
			how.meth = solver == "glpk-dual" ? GLP_DUAL : GLP_PRIMAL;
			glp_scale_prob(g, GLP_SF_AUTO);
			status = glp_simplex(g, &how);
			t2 = now();
			if (glp_get_status(g) != GLP_OPT) status = 1;
			iterations = glp_get_it_cnt(g);
			objective = glp_get_obj_val(g);
			for (int j = 0; j < n; j++) x[j] = glp_get_col_prim(g, j + 1);
			glp_delete_prob(g);
		}
		if (status != 0) { fprintf(stderr, "%s ended with status %d\n", argv[2], status); return 1; }
		slow = since(t0, t2) > 3; // one run must do
		if (k == 0 && !slow) continue; // the first warms up
		double violation = 0;
		int binding = 0;
		for (int i = 0; i < m; i++) {
			double r = 0;
			for (int j = 0; j < n; j++) r += p.a[(size_t)i * n + j] * x[j];
			violation = std::fmax(violation, r - p.limits[i]);
			binding += r > p.limits[i] * (1 - 1e-9);
		}
		printf("run %s %.9f %.9f %d %.15g %.3g %d\n", argv[2], since(t0, t1), since(t1, t2), iterations, objective, violation, binding);
		fflush(stdout);
	}
}
