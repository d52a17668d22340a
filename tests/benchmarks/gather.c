/* The sampling stage as plain C: cubic positions, four corners, bilinear, lowest corner, samples at 0 m. */
#include <math.h>
#include <stdint.h>

static void cubic(const double *y, double *c) {
    c[0] = y[0];
    c[1] = (-11 * y[0] + 18 * y[1] - 9 * y[2] + 2 * y[3]) / 2;
    c[2] = (18 * y[0] - 45 * y[1] + 36 * y[2] - 9 * y[3]) / 2;
    c[3] = (-9 * y[0] + 27 * y[1] - 27 * y[2] + 9 * y[3]) / 2;
}

int64_t sample(const int16_t *samples, int64_t columns, int64_t paths, const int64_t *first_knot, const double *row,
               const double *column, const int64_t *points, float *height) {
    int64_t zeros = 0;
    for (int64_t p = 0; p < paths; p++) {
        const int64_t n = points[p], segments = (first_knot[p + 1] - first_knot[p] - 1) / 3;
        const double per_point = (double)segments / (double)(n - 1);
        int64_t i = 0;
        float lowest = 3e38f;
        for (int64_t s = 0; s < segments; s++) {
            const int64_t last = s == segments - 1 ? n : (int64_t)ceil((s + 1) / per_point);
            double r[4], c[4];
            cubic(row + first_knot[p] + 3 * s, r);
            cubic(column + first_knot[p] + 3 * s, c);
            for (; i < last; i++) {
                const double t = (double)i * per_point - (double)s;
                const double y = r[0] + t * (r[1] + t * (r[2] + t * r[3])), x = c[0] + t * (c[1] + t * (c[2] + t * c[3]));
                const int64_t top = (int64_t)y, left = (int64_t)x;
                const float v = (float)(y - (double)top), u = (float)(x - (double)left);
                const int16_t *at = samples + top * columns + left;
                const float a = at[0], b = at[1], d = at[columns], e = at[columns + 1];
                const float upper = a + u * (b - a), lower = d + u * (e - d);
                const float least = fminf(fminf(a, b), fminf(d, e));
                height[i] = upper + v * (lower - upper);
                lowest = least < lowest ? least : lowest;
                zeros += (v > 0.5f ? (u > 0.5f ? e : d) : (u > 0.5f ? b : a)) == 0.0f;
            }
        }
        if (lowest <= -32768.0f) return -1;
    }
    return zeros;
}
