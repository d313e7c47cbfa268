/* The delay-and-sum of beamctl/engine/kernels.py, written straight down in C for comparison: the same
   rows, the same parabolas, the same two rows per sample. Built by speed.py where a compiler is; never
   shipped. */
#include <math.h>
#include <string.h>

#define ROWS 16
#define TAPS 6

void delay_and_sum(int beams, int feeds, int cells, int segment, int row_length, int row_at,
                   const float *base, int base_length,       /* (beams, 2, base_length) */
                   const float *taps,                        /* (16, 6) */
                   const double *at,                         /* (4, cells) */
                   const double *wanted,                     /* (2, cells) */
                   const long *feed, const double *share,    /* (cells) */
                   const double *aims,                       /* (beams, 3, 4): x y z 1/m at 3 points */
                   double carrier_hz, double slowness, double base_s, double per_s,
                   double cycles, double sample,
                   float *rows,                              /* (beams, 16, 2, row_length) */
                   double *coef, double *delay,              /* (feeds, 6), (feeds, 3) */
                   float *acc,                               /* (2, feeds, segment) */
                   float *out)                               /* (feeds, segment) */
{
    memset(acc, 0, sizeof(float) * 2 * feeds * segment);
    for (int b = 0; b < beams; b++) {
        memset(coef, 0, sizeof(double) * 6 * feeds);
        memset(delay, 0, sizeof(double) * 3 * feeds);
        for (int step = 0; step < 3; step++) {
            const double *aim = aims + (b * 3 + step) * 4;
            for (int n = 0; n < cells; n++) {
                double dot = at[n] * aim[0] + at[cells + n] * aim[1] + at[2 * cells + n] * aim[2];
                double square = at[3 * cells + n], k = aim[3];
                double lead = (2.0 * dot - k * square) / (1.0 + sqrt(1.0 - 2.0 * k * dot + k * k * square));
                double tau = base_s + lead * slowness;
                double phase = -2.0 * M_PI * carrier_hz * tau;
                double c = cos(phase), s = sin(phase);
                coef[feed[n] * 6 + 2 * step] += wanted[n] * c - wanted[cells + n] * s;
                coef[feed[n] * 6 + 2 * step + 1] += wanted[n] * s + wanted[cells + n] * c;
                delay[feed[n] * 3 + step] += share[n] * tau * per_s;
            }
        }
        for (int f = 0; f < feeds; f++) {
            double *c = coef + 6 * f, *d = delay + 3 * f, span = segment;
            for (int q = 0; q < 2; q++) {
                double p0 = c[q], p1 = c[2 + q], p2 = c[4 + q];
                c[2 + q] = (-3.0 * p0 + 4.0 * p1 - p2) / span;
                c[4 + q] = 2.0 * (p0 - 2.0 * p1 + p2) / (span * span);
            }
            double p0 = d[0], p1 = d[1], p2 = d[2];
            d[1] = (-3.0 * p0 + 4.0 * p1 - p2) / span;
            d[2] = 2.0 * (p0 - 2.0 * p1 + p2) / (span * span);
        }
        float *r = rows + (long)b * ROWS * 2 * row_length;
        for (int j = 0; j < ROWS; j++)
            for (int q = 0; q < 2; q++) {
                const float *h = taps + j * TAPS, *x = base + (b * 2 + q) * base_length + TAPS - 1;
                float *y = r + (j * 2 + q) * row_length + row_at;
                for (int i = 0; i < segment; i++)
                    y[i] = h[0] * x[i] + h[1] * x[i - 1] + h[2] * x[i - 2] + h[3] * x[i - 3]
                         + h[4] * x[i - 4] + h[5] * x[i - 5];
            }
        for (int f = 0; f < feeds; f++) {
            const double *c = coef + 6 * f, *d = delay + 3 * f;
            float c0 = c[0], s0 = c[1], c1 = c[2], s1 = c[3], c2 = c[4], s2 = c[5];
            float *in_phase = acc + f * segment, *quadrature = acc + (feeds + f) * segment;
            for (int i = 0; i < segment; i++) {
                double late = d[0] + i * (d[1] + i * d[2]);
                int row = (int)late;
                float w = (float)(late - row);
                const float *a = r + (row & 15) * 2 * row_length + row_at + i - (row >> 4);
                const float *z = r + ((row + 1) & 15) * 2 * row_length + row_at + i - ((row + 1) >> 4);
                float ei = a[0] + w * (z[0] - a[0]);
                float eq = a[row_length] + w * (z[row_length] - a[row_length]);
                float t = i, cc = c0 + t * (c1 + t * c2), ss = s0 + t * (s1 + t * s2);
                in_phase[i] += ei * cc - eq * ss;
                quadrature[i] += ei * ss + eq * cc;
            }
        }
    }
    for (int i = 0; i < segment; i++) {
        double turns = (sample + i) * cycles, angle = 2.0 * M_PI * (turns - floor(turns));
        float c = cos(angle), s = sin(angle);
        for (int f = 0; f < feeds; f++)
            out[f * segment + i] = acc[f * segment + i] * c - acc[(feeds + f) * segment + i] * s;
    }
}
