// The sensitivity table by CHOLMOD: analyse, factor, 100 receptors' solves in blocks, read at 1,000 wells.
//
//   cholesky FILE super|simple|auto amd|metis BLOCK
//
// FILE is what TestWriteMatrix of aquifer/sparse leaves. One line of figures is printed; reading the file is in none of the
// times but in the peak memory, as on the other side.
#include <cholmod.h>
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <time.h>

static double now(void) {
	struct timespec t;
	clock_gettime(CLOCK_MONOTONIC, &t);
	return t.tv_sec + 1e-9 * t.tv_nsec;
}

// cpu is the processor time of all threads so far.
static double cpu(void) {
	struct timespec t;
	clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &t);
	return t.tv_sec + 1e-9 * t.tv_nsec;
}

static void die(const char *what) {
	fprintf(stderr, "cholesky: %s\n", what);
	exit(1);
}

static void take(void *to, size_t size, size_t count, FILE *f) {
	if (fread(to, size, count, f) != count) die("the file is too short");
}

static double peak_mb(void) {
	struct rusage u;
	getrusage(RUSAGE_SELF, &u);
	return u.ru_maxrss / 1024.0;
}

static int64_t receptors, wells;
static int32_t *receptor, *well;

static cholmod_sparse *read_matrix(const char *name, cholmod_common *c) {
	FILE *f = fopen(name, "rb");
	if (!f) die("cannot open the file");
	char magic[8];
	int64_t head[4];
	take(magic, 1, 8, f);
	if (memcmp(magic, "SPDMAT01", 8)) die("not a matrix file");
	take(head, 8, 4, f);
	int64_t n = head[0], entries = head[1];
	receptors = head[2], wells = head[3];
	cholmod_sparse *a = cholmod_allocate_sparse(n, n, entries, 1, 1, -1, CHOLMOD_REAL, c);
	if (!a) die("out of memory");
	int32_t *start = a->p;
	for (int64_t j = 0; j <= n; j++) {
		int64_t at;
		take(&at, 8, 1, f);
		start[j] = at;
	}
	take(a->i, 4, entries, f);
	take(a->x, 8, entries, f);
	receptor = malloc(4 * receptors), well = malloc(4 * wells);
	take(receptor, 4, receptors, f);
	take(well, 4, wells, f);
	fclose(f);
	return a;
}

// residual is the scaled residual |A x - e_k| / (|A| |x| + 1) in the largest-entry norm.
static double residual(cholmod_sparse *a, const double *x, int32_t k, double norm, double *r) {
	int32_t *start = a->p, *row = a->i;
	double *value = a->x, most = 0, size = 0;
	memset(r, 0, 8 * a->nrow);
	r[k] = -1;
	for (size_t j = 0; j < a->ncol; j++)
		for (int32_t p = start[j]; p < start[j + 1]; p++) {
			int32_t i = row[p];
			r[i] += value[p] * x[j];
			if ((size_t)i != j) r[j] += value[p] * x[i];
		}
	for (size_t i = 0; i < a->nrow; i++) most = fmax(most, fabs(r[i])), size = fmax(size, fabs(x[i]));
	return most / (norm * size + 1);
}

static double norm_of(cholmod_sparse *a, double *sum) {
	int32_t *start = a->p, *row = a->i;
	double *value = a->x, most = 0;
	memset(sum, 0, 8 * a->nrow);
	for (size_t j = 0; j < a->ncol; j++)
		for (int32_t p = start[j]; p < start[j + 1]; p++) {
			sum[j] += fabs(value[p]);
			if ((size_t)row[p] != j) sum[row[p]] += fabs(value[p]);
		}
	for (size_t i = 0; i < a->nrow; i++) most = fmax(most, sum[i]);
	return most;
}

typedef struct {
	cholmod_dense *x, *y, *e;
} space;

// solve makes the unit right-hand sides of receptors from..from+k-1 and solves for them.
static double *solve(cholmod_factor *l, cholmod_dense *b, space *s, int64_t from, int64_t k, cholmod_common *c) {
	b->ncol = k;
	memset(b->x, 0, 8 * b->nrow * k);
	for (int64_t r = 0; r < k; r++) ((double *)b->x)[r * b->nrow + receptor[(from + r) % receptors]] = 1;
	if (!cholmod_solve2(CHOLMOD_A, l, b, NULL, &s->x, NULL, &s->y, &s->e, c)) die("solve failed");
	return s->x->x;
}

int main(int argc, char **argv) {
	if (argc != 5) die("usage: cholesky FILE super|simple|auto amd|metis BLOCK");
	cholmod_common common, *c = &common;
	cholmod_start(c);
	int64_t block = atoll(argv[4]);
	c->supernodal = !strcmp(argv[2], "super") ? CHOLMOD_SUPERNODAL : !strcmp(argv[2], "simple") ? CHOLMOD_SIMPLICIAL : CHOLMOD_AUTO;
	c->nmethods = 1;
	c->method[0].ordering = !strcmp(argv[3], "metis") ? CHOLMOD_METIS : CHOLMOD_AMD;
	c->postorder = 1;
	cholmod_sparse *a = read_matrix(argv[1], c);
	int64_t n = a->nrow;
	double *table = malloc(8 * receptors * wells);

	double c0 = cpu(), t0 = now();
	cholmod_factor *l = cholmod_analyze(a, c);
	double c1 = cpu(), t1 = now();
	if (!l || !cholmod_factorize(a, l, c) || c->status != CHOLMOD_OK) die("factorisation failed");
	double c2 = cpu(), t2 = now();
	cholmod_dense *b = cholmod_allocate_dense(n, block, n, CHOLMOD_REAL, c);
	space s = {0};
	for (int64_t from = 0; from < receptors; from += block) {
		int64_t k = receptors - from < block ? receptors - from : block;
		double *x = solve(l, b, &s, from, k, c);
		for (int64_t r = 0; r < k; r++)
			for (int64_t w = 0; w < wells; w++) table[(from + r) * wells + w] = x[r * n + well[w]];
	}
	double c3 = cpu(), t3 = now();
	double peak = peak_mb();

	double sum = 0;
	for (int64_t i = 0; i < receptors * wells; i++) sum += table[i];
	double one[5], t16 = now();
	solve(l, b, &s, 0, block < 16 ? block : 16, c);
	t16 = now() - t16;
	for (int r = 0; r < 5; r++) {
		double t = now();
		solve(l, b, &s, r, 1, c);
		one[r] = now() - t;
		for (int q = r; q > 0 && one[q] < one[q - 1]; q--) {
			double v = one[q];
			one[q] = one[q - 1], one[q - 1] = v;
		}
	}
	double *r = malloc(8 * n), norm = norm_of(a, r), worst = 0;
	for (int64_t k = 0; k < receptors; k += 10) worst = fmax(worst, residual(a, solve(l, b, &s, k, 1, c), receptor[k], norm, r));
	printf("figures %lld %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.3f %.0f %.1e %.12g %.2f\n", (long long)n, 1e3 * (t1 - t0),
		1e3 * (t2 - t1), 1e3 * (t3 - t2), 1e3 * (t3 - t0), 1e3 * (c1 - c0), 1e3 * (c2 - c1), 1e3 * (c3 - c2), 1e3 * (c3 - c0), 1e3 * one[2],
		1e3 * t16, peak, worst, sum, c->lnz / 1e6);
	return 0;
}
