/* Plain scalar conduction into rock under a flame: 64 graded cells, 150 implicit steps, one solve at a time.
 *
 *     rho c(T) dT/dt = d/dz ( k(T) dT/dz ),   q = eps (G - sigma T^4) + h (Tg - T) at the face
 *
 * Backward Euler, linearised once a step (radiation and properties at the old temperature), Thomas elimination. k is the law of
 * Vosteen & Schellschmidt 2003, k = k0/(0.99 + a T), c a table of ratios, linear between rows.
 *
 *     cc -O2 -o column column.c -lm && ./column REPEATS < parameters
 *
 * Parameters, one line: eps G Tg h growth residence decay ambient density c20 k0 slope depth end n, then n pairs "C ratio".
 * Prints the time of a solve in microseconds, then "time face_K" of every step.
 */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

enum { CELLS = 64, STEPS = 150, ROWS = 32 };
static const double SIGMA = 5.670374419e-8, ICE = 273.15;

struct problem {
    double eps, g, gas, h, growth, residence, decay, ambient, density, c20, k0, slope, depth, end;
    int n;
    double row_c[ROWS], ratio[ROWS];
};

static double heat_ratio(const struct problem *p, double celsius)
{
    if (celsius <= p->row_c[0]) return p->ratio[0];
    for (int i = 1; i < p->n; i++)
        if (celsius < p->row_c[i]) {
            double share = (celsius - p->row_c[i - 1]) / (p->row_c[i] - p->row_c[i - 1]);
            return p->ratio[i - 1] + share * (p->ratio[i] - p->ratio[i - 1]);
        }
    return p->ratio[p->n - 1];
}

static double shape(const struct problem *p, double t)
{
    if (t < p->growth) return (t / p->growth) * (t / p->growth);
    if (t <= p->residence) return 1.0;
    return exp(-(t - p->residence) / p->decay);
}

/* Cells grow by one factor from the face to the depth; the face temperature is extrapolated through half a cell. */
static void solve(const struct problem *p, const double *dz, const double *times, double *face)
{
    double t[CELLS], k[CELLS], follow[CELLS], value[CELLS];
    for (int i = 0; i < CELLS; i++) t[i] = p->ambient;
    double surface = p->ambient, ambient4 = SIGMA * pow(p->ambient, 4);
    for (int step = 0; step < STEPS; step++) {
        double dt = times[step + 1] - times[step], s = shape(p, times[step + 1]);
        double g = ambient4 + s * (p->g - ambient4), gas = p->ambient + s * (p->gas - p->ambient);
        for (int i = 0; i < CELLS; i++) k[i] = p->k0 / (0.99 + p->slope * (t[i] - ICE));
        /* q = flux - stiffness (T_face - surface), T_face tied to the first cell by half a cell of rock. */
        double cube = surface * surface * surface;
        double stiffness = 4.0 * p->eps * SIGMA * cube + p->h;
        double flux = p->eps * (g - SIGMA * cube * surface) + p->h * (gas - surface);
        double half = 2.0 * k[0] / dz[0];
        double tie = half * stiffness / (half + stiffness);
        double drive = surface + flux / stiffness;
        double up = tie, below = 0.0, before = 0.0;
        for (int i = 0; i < CELLS; i++) {
            double down = i + 1 < CELLS ? 2.0 / (dz[i] / k[i] + dz[i + 1] / k[i + 1]) : 0.0;
            double store = p->density * p->c20 * heat_ratio(p, t[i] - ICE) * dz[i] / dt;
            double right = store * t[i] + (i ? up * before : tie * drive);
            double pivot = store + up + down - (i ? up * below : 0.0);
            below = down / pivot;
            before = right / pivot;
            follow[i] = below;
            value[i] = before;
            up = down;
        }
        t[CELLS - 1] = value[CELLS - 1];
        for (int i = CELLS - 2; i >= 0; i--) t[i] = value[i] + follow[i] * t[i + 1];
        surface = (half * t[0] + stiffness * drive) / (half + stiffness);
        face[step] = surface;
    }
}

int main(int argc, char **argv)
{
    struct problem p;
    int repeats = argc > 1 ? atoi(argv[1]) : 200;
    if (scanf("%lf %lf %lf %lf %lf %lf %lf %lf %lf %lf %lf %lf %lf %lf %d", &p.eps, &p.g, &p.gas, &p.h, &p.growth, &p.residence,
              &p.decay, &p.ambient, &p.density, &p.c20, &p.k0, &p.slope, &p.depth, &p.end, &p.n) != 15 || p.n > ROWS)
        return 2;
    for (int i = 0; i < p.n; i++)
        if (scanf("%lf %lf", &p.row_c[i], &p.ratio[i]) != 2) return 2;

    /* Grid: first cell a thousandth of the depth. Steps: a third each in growth, plateau and decay, the latter two lengthening. */
    double dz[CELLS], times[STEPS + 1], face[STEPS], low = 1.0001, high = 2.0;
    for (int i = 0; i < 100; i++) {
        double mid = 0.5 * (low + high), sum = (pow(mid, CELLS) - 1.0) / (mid - 1.0);
        if (sum < 1000.0) low = mid; else high = mid;
    }
    for (int i = 0; i < CELLS; i++) dz[i] = p.depth / 1000.0 * pow(low, i);
    times[0] = 0.0;
    for (int j = 1; j <= 50; j++) {
        times[j] = p.growth * j / 50.0;
        times[50 + j] = p.growth + (p.residence - p.growth) * (pow(8.0, j / 50.0) - 1.0) / 7.0;
        times[100 + j] = p.residence + (p.end - p.residence) * (pow(8.0, j / 50.0) - 1.0) / 7.0;
    }
    double best = 1e300;
    for (int r = 0; r < repeats; r++) {
        struct timespec a, b;
        clock_gettime(CLOCK_MONOTONIC, &a);
        solve(&p, dz, times, face);
        clock_gettime(CLOCK_MONOTONIC, &b);
        double took = (b.tv_sec - a.tv_sec) * 1e6 + (b.tv_nsec - a.tv_nsec) * 1e-3;
        if (took < best) best = took;
    }
    printf("%.3f\n", best);
    for (int j = 0; j < STEPS; j++) printf("%.17g %.17g\n", times[j + 1], face[j]);
    return 0;
}
