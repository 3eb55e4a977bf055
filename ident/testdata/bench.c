/* The recursions of ../run.go in C, for the ratio in BenchmarkAgainstC:

       bench STRUCTURE INPUT ROWS SECONDS [show]

   STRUCTURE is fopdt or chain3 with the lags of the benchmark, INPUT bump or
   telegraph. Prints the least time per row, in ns, of filling the response and
   its sensitivities ("fill"), and of forming the residuals and the normal
   equations for gain, baseline, lags and dead time without storing a column
   ("fused"). The transition comes from exponentials in closed form; the cost of
   it does not matter here. */

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#define H 0.05

static double *y, *dtheta, *v1, *v2, *v3, *data;
static double sums[64];

static double now(void) {
	struct timespec t;
	clock_gettime(CLOCK_MONOTONIC, &t);
	return t.tv_sec + 1e-9 * t.tv_nsec;
}

struct chain { double a[3][3], b[3][3], kick[6], rate; };

/* Distinct lags: entries as sums of exponentials; good enough to time. */
static double divided(const double *x, int m) {
	if (m == 0) return exp(x[0]);
	if (fabs(x[m] - x[0]) < 1e-9) return exp(x[0]) / tgamma(m + 1);
	return (divided(x + 1, m - 1) - divided(x, m - 1)) / (x[m] - x[0]);
}

static int ascending(const void *p, const void *q) {
	double d = *(const double *)p - *(const double *)q;
	return (d > 0) - (d < 0);
}

static void transition(struct chain *c, const double *tau, int n, double h) {
	for (int j = 0; j < n; j++) {
		double product = 1, shorter = 0, x[4];
		for (int i = j; i < n; i++) {
			if (i > j) { shorter = product; product *= h / tau[i]; }
			for (int k = j; k <= i; k++) x[k - j] = -h / tau[k];
			c->a[i][j] = product * divided(x, i - j);
		}
		for (int i = 0; i < n; i++) {
			double through;
			for (int k = j; k < n; k++) x[k - j] = -h / tau[k];
			x[n - j] = -h / tau[i];
			qsort(x, n - j + 1, sizeof *x, ascending);
			through = product * divided(x, n - j);
			if (j < n - 1) {
				for (int k = j; k < n - 1; k++) x[k - j] = -h / tau[k];
				x[n - 1 - j] = -h / tau[i];
				qsort(x, n - j, sizeof *x, ascending);
				through -= shorter * divided(x, n - 1 - j);
			}
			c->b[i][j] = h / tau[i] * through / tau[n - 1];
		}
	}
	c->rate = 1 / tau[n - 1];
	for (int i = 0; i < n; i++) {
		c->kick[i] = c->kick[n + i] = 0;
		for (int j = 0; j <= i; j++) c->kick[i] += c->a[i][j];
		for (int j = 0; j < n; j++) c->kick[n + i] += c->b[i][j];
	}
}

static void fill1(const struct chain *c, double *restrict x, double level, int lo, int hi) {
	double p = c->a[0][0], q = c->b[0][0], rate = c->rate, e = x[0], w = x[1];
	double *restrict yy = y, *restrict d = dtheta, *restrict v = v1;
	for (int k = lo; k < hi; k++) {
		w = q * e + p * w;
		e = p * e;
		yy[k] = level + e;
		d[k] = e * rate;
		v[k] = w;
	}
	x[0] = e; x[1] = w;
}

static void fused1(const struct chain *c, double *restrict x, double level, int lo, int hi) {
	double p = c->a[0][0], q = c->b[0][0], rate = c->rate, e = x[0], w = x[1], s[15] = {0};
	for (int k = lo; k < hi; k++) {
		w = q * e + p * w;
		e = p * e;
		double g = level + e, t = e * rate, r = data[k] - g;
		s[0] += g * g; s[1] += g * w; s[2] += g * t; s[3] += g; s[4] += w * w; s[5] += w * t;
		s[6] += w; s[7] += t * t; s[8] += t; s[9] += r * g; s[10] += r * w; s[11] += r * t;
		s[12] += r; s[13] += r * r;
	}
	x[0] = e; x[1] = w;
	for (int i = 0; i < 14; i++) sums[i] += s[i];
}

#define STEP3 \
	w1 = b11 * e1 + b12 * e2 + b13 * e3 + a11 * w1; \
	w2 = b21 * e1 + b22 * e2 + b23 * e3 + a22 * w2; \
	w3 = b31 * e1 + b32 * e2 + b33 * e3 + a33 * w3; \
	e3 = a31 * e1 + a32 * e2 + a33 * e3; \
	e2 = a21 * e1 + a22 * e2; \
	e1 = a11 * e1;

#define LOAD3 \
	double a11 = c->a[0][0], a21 = c->a[1][0], a22 = c->a[1][1]; \
	double a31 = c->a[2][0], a32 = c->a[2][1], a33 = c->a[2][2]; \
	double b11 = c->b[0][0], b12 = c->b[0][1], b13 = c->b[0][2]; \
	double b21 = c->b[1][0], b22 = c->b[1][1], b23 = c->b[1][2]; \
	double b31 = c->b[2][0], b32 = c->b[2][1], b33 = c->b[2][2], rate = c->rate; \
	double e1 = x[0], e2 = x[1], e3 = x[2], w1 = x[3], w2 = x[4], w3 = x[5];

#define SAVE3 x[0] = e1; x[1] = e2; x[2] = e3; x[3] = w1; x[4] = w2; x[5] = w3;

static void fill3(const struct chain *c, double *restrict x, double level, int lo, int hi) {
	LOAD3
	double *restrict yy = y, *restrict d = dtheta, *restrict p = v1, *restrict q = v2, *restrict r = v3;
	for (int k = lo; k < hi; k++) {
		STEP3
		yy[k] = level + e3;
		d[k] = (e3 - e2) * rate;
		p[k] = w1; q[k] = w2; r[k] = w3;
	}
	SAVE3
}

static void fused3(const struct chain *c, double *restrict x, double level, int lo, int hi) {
	LOAD3
	double s[27] = {0};
	for (int k = lo; k < hi; k++) {
		STEP3
		double g = level + e3, t = (e3 - e2) * rate, r = data[k] - g;
		s[0] += g * g; s[1] += g * w1; s[2] += g * w2; s[3] += g * w3; s[4] += g * t; s[5] += g;
		s[6] += w1 * w1; s[7] += w1 * w2; s[8] += w1 * w3; s[9] += w1 * t; s[10] += w1;
		s[11] += w2 * w2; s[12] += w2 * w3; s[13] += w2 * t; s[14] += w2;
		s[15] += w3 * w3; s[16] += w3 * t; s[17] += w3; s[18] += t * t; s[19] += t;
		s[20] += r * g; s[21] += r * w1; s[22] += r * w2; s[23] += r * w3; s[24] += r * t;
		s[25] += r; s[26] += r * r;
	}
	SAVE3
	for (int i = 0; i < 27; i++) sums[i] += s[i];
}

typedef void piece(const struct chain *, double *restrict, double, int, int);

/* The change before row at[j] falls 30 ms before that row; it is applied to the
   state one row earlier, taken back by 20 ms. */
static void evaluate(piece *run, const struct chain *step, const struct chain *early, int n, const int *at, int changes, int rows) {
	double x[6] = {0}, level = 0;
	int k = 0;
	for (int j = 0; j < changes && at[j] < rows; j++) {
		double du = 1 - 2 * level;
		run(step, x, level, k, at[j]);
		for (int i = 0; i < 2 * n; i++) x[i] -= du * early->kick[i];
		level += du;
		k = at[j];
	}
	run(step, x, level, k, rows);
}

int main(int argc, char **argv) {
	if (argc < 5) return 2;
	int n = strcmp(argv[1], "fopdt") == 0 ? 1 : 3, telegraph = strcmp(argv[2], "telegraph") == 0;
	int rows = atoi(argv[3]);
	double seconds = atof(argv[4]);
	double tau1[] = {2.1}, tau3[] = {0.05, 0.65, 2.1}, *tau = n == 1 ? tau1 : tau3;
	int changes = telegraph ? rows / 20 : 1, *at = malloc((changes + 1) * sizeof *at);
	for (int j = 0; j < changes; j++) at[j] = telegraph ? 5 + 20 * j : rows / 10 + 5;
	double **columns[] = {&y, &dtheta, &v1, &v2, &v3, &data};
	for (int i = 0; i < 6; i++) {
		*columns[i] = malloc(rows * sizeof **columns[i]);
		for (int k = 0; k < rows; k++) (*columns[i])[k] = 0.5;
	}
	struct chain step = {0}, early = {0};
	transition(&step, tau, n, H);
	transition(&early, tau, n, -0.02);
	piece *fill = n == 1 ? fill1 : fill3, *fused = n == 1 ? fused1 : fused3;
	double best[2] = {1e9, 1e9};
	for (double start = now(); now() - start < seconds;)
		for (int which = 0; which < 2; which++) {
			double t = now();
			evaluate(which ? fused : fill, &step, &early, n, at, changes, rows);
			t = now() - t;
			if (t < best[which]) best[which] = t;
		}
	printf("%.4f %.4f\n", 1e9 * best[0] / rows, 1e9 * best[1] / rows);
	if (argc > 5) /* for a check against run.go: some rows, all columns */
		for (int k = 0; k < rows; k += rows / 7)
			printf("%.15g %.15g %.15g %.15g %.15g\n", y[k], v1[k], v2[k], v3[k], dtheta[k]);
	return 0;
}
