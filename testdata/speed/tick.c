/* A sampled loop of order six as an engineer writes it by hand: the yardstick of the time a tick takes in package sim.
 *
 *     cc -O2 -std=c99 -o tick tick.c -lm && ./tick 10000000
 *
 * Plant 80/(s^3 + 60 s^2 + 500 s) with a sensor lag of 0.4 ms, ticks of 0.5 ms, the effort applied 0.14 ms after the
 * sample, within +-24; controller (4000 z - 3980)/(z - 0.6) + 0.05/(z - 1); reference 1. Between the instants the plant
 * is propagated by its matrix exponential, here summed as a series at the start. It looks at the tracking
 * error at both instants of a tick: its peak, and its rms by the trapezoidal rule.
 *
 * Prints nanoseconds a tick, then y at the end, rms and peak. */
#define _POSIX_C_SOURCE 199309L
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

enum { N = 4 };

/* e = exp([A B; 0 0] h) - I, its upper N rows. */
static void propagator(double a[N][N], const double b[N], double h, double e[N][N + 1])
{
    double m[N + 1][N + 1] = {{0}}, p[N + 1][N + 1] = {{0}}, s[N + 1][N + 1] = {{0}};
    for (int i = 0; i < N; i++) {
        for (int j = 0; j < N; j++)
            m[i][j] = a[i][j] * h;
        m[i][N] = b[i] * h;
    }
    for (int i = 0; i <= N; i++)
        p[i][i] = 1;
    for (int k = 1; k <= 40; k++) {
        double q[N + 1][N + 1] = {{0}};
        for (int i = 0; i <= N; i++)
            for (int j = 0; j <= N; j++)
                for (int l = 0; l <= N; l++)
                    q[i][j] += p[i][l] * m[l][j] / k;
        for (int i = 0; i <= N; i++)
            for (int j = 0; j <= N; j++) {
                p[i][j] = q[i][j];
                s[i][j] += q[i][j];
            }
    }
    for (int i = 0; i < N; i++)
        for (int j = 0; j <= N; j++)
            e[i][j] = s[i][j];
}

static inline void step(double x[N], double e[N][N + 1], double u)
{
    double d[N];
    for (int i = 0; i < N; i++)
        d[i] = e[i][0] * x[0] + e[i][1] * x[1] + e[i][2] * x[2] + e[i][3] * x[3] + e[i][4] * u;
    for (int i = 0; i < N; i++)
        x[i] += d[i];
}

int main(int argc, char **argv)
{
    long ticks = argc > 1 ? atol(argv[1]) : 1000000;
    const double T = 1. / 2000, delay = 0.00014, lag = 0.0004, r = 1, high = 24;
    double a[N][N] = {{0, 1, 0, 0}, {0, 0, 1, 0}, {0, -500, -60, 0}, {0}}, b[N] = {0, 0, 80, 0};
    a[3][0] = 1 / lag;
    a[3][3] = -1 / lag;
    double first[N][N + 1], second[N][N + 1];
    propagator(a, b, delay, first);
    propagator(a, b, T - delay, second);
    double x[N] = {0}, u = 0, lead = 0, sum = 0, peak = 0, square = 0;
    struct timespec from, to;
    clock_gettime(CLOCK_MONOTONIC, &from);
    for (long k = 0; k < ticks; k++) {
        double e = r - x[3];
        double v = 4000 * e + lead + sum;
        lead += T * (-800 * lead - 3160000 * e); /* (4000 z - 3980)/(z - 0.6) = 4000 - 1580/(z - 0.6), and 0.4/T = 800, 1580/T */
        sum += 0.05 * e;
        double now = v > high ? high : v < -high ? -high : v;
        double miss = r - x[0];
        if (fabs(miss) > peak)
            peak = fabs(miss);
        double part = miss * miss;
        step(x, first, u);
        u = now;
        miss = r - x[0];
        if (fabs(miss) > peak)
            peak = fabs(miss);
        square += (part + miss * miss) / 2 * delay;
        part = miss * miss;
        step(x, second, u);
        miss = r - x[0];
        square += (part + miss * miss) / 2 * (T - delay);
    }
    clock_gettime(CLOCK_MONOTONIC, &to);
    double ns = ((double)(to.tv_sec - from.tv_sec) * 1e9 + (double)(to.tv_nsec - from.tv_nsec)) / (double)ticks;
    printf("%.4g\n%.17g\n%.17g\n%.17g\n", ns, x[0], sqrt(square / ((double)ticks * T)), peak);
    return 0;
}
