/* What a careful user would write by hand in C: the loops driftwell is measured against.
 *
 * Compiled by tools/bench.py with gcc -O3 -march=native -ffast-math. SI units, arrays of n.
 */
#include <math.h>

/* Kick-drift-kick for equal ions in a linear RF trap with static axial confinement, each pair once.
 *   phi = V0 cos(w t) (x^2 - y^2) / (2 r0^2) + (curvature / 2) (z^2 - (x^2 + y^2) / 2)
 */
void trap_pairs_once(long steps, int n, double *x, double *y, double *z, double *ux, double *uy,
                     double *uz, double *ax, double *ay, double *az, double ratio, double pair,
                     double gradient, double omega, double curvature, double h)
{
    for (long s = 0; s < steps; s++) {
        for (int i = 0; i < n; i++) {
            ux[i] += 0.5 * h * ax[i];
            uy[i] += 0.5 * h * ay[i];
            uz[i] += 0.5 * h * az[i];
            x[i] += h * ux[i];
            y[i] += h * uy[i];
            z[i] += h * uz[i];
        }
        double g = gradient * cos(omega * (s + 1) * h);
        for (int i = 0; i < n; i++) {
            ax[i] = ratio * (0.5 * curvature - g) * x[i];
            ay[i] = ratio * (0.5 * curvature + g) * y[i];
            az[i] = -ratio * curvature * z[i];
        }
        for (int i = 0; i < n; i++) {
            double fx = 0.0, fy = 0.0, fz = 0.0;
            for (int j = i + 1; j < n; j++) {
                double dx = x[i] - x[j], dy = y[i] - y[j], dz = z[i] - z[j];
                double r2 = dx * dx + dy * dy + dz * dz;
                double f = pair / (r2 * sqrt(r2));
                fx += f * dx;
                fy += f * dy;
                fz += f * dz;
                ax[j] -= f * dx;
                ay[j] -= f * dy;
                az[j] -= f * dz;
            }
            ax[i] += fx;
            ay[i] += fy;
            az[i] += fz;
        }
        for (int i = 0; i < n; i++) {
            ux[i] += 0.5 * h * ax[i];
            uy[i] += 0.5 * h * ay[i];
            uz[i] += 0.5 * h * az[i];
        }
    }
}

/* The same loop with all n^2 terms, its arrays promised not to overlap: gcc vectorises it. */
void trap_all_terms(long steps, int n, double *restrict x, double *restrict y, double *restrict z,
                    double *restrict ux, double *restrict uy, double *restrict uz,
                    double *restrict ax, double *restrict ay, double *restrict az, double ratio,
                    double pair, double gradient, double omega, double curvature, double h)
{
    for (long s = 0; s < steps; s++) {
        for (int i = 0; i < n; i++) {
            ux[i] += 0.5 * h * ax[i];
            uy[i] += 0.5 * h * ay[i];
            uz[i] += 0.5 * h * az[i];
            x[i] += h * ux[i];
            y[i] += h * uy[i];
            z[i] += h * uz[i];
        }
        double g = gradient * cos(omega * (s + 1) * h);
        for (int i = 0; i < n; i++) {
            double fx = ratio * (0.5 * curvature - g) * x[i];
            double fy = ratio * (0.5 * curvature + g) * y[i];
            double fz = -ratio * curvature * z[i];
            for (int j = 0; j < n; j++) {
                double dx = x[i] - x[j], dy = y[i] - y[j], dz = z[i] - z[j];
                double r2 = dx * dx + dy * dy + dz * dz;
                r2 = r2 > 0.0 ? r2 : 1.0;
                double f = pair / (r2 * sqrt(r2));
                fx += f * dx;
                fy += f * dy;
                fz += f * dz;
            }
            ax[i] = fx;
            ay[i] = fy;
            az[i] = fz;
        }
        for (int i = 0; i < n; i++) {
            ux[i] += 0.5 * h * ax[i];
            uy[i] += 0.5 * h * ay[i];
            uz[i] += 0.5 * h * az[i];
        }
    }
}

/* The plain pair loop, all n^2 terms: the field of charges q at each of them, without 1/4 pi eps0. */
void pair_loop(int n, const double *restrict x, const double *restrict y, const double *restrict z,
               const double *restrict q, double *restrict ex, double *restrict ey,
               double *restrict ez)
{
    for (int i = 0; i < n; i++) {
        double fx = 0.0, fy = 0.0, fz = 0.0;
        for (int j = 0; j < n; j++) {
            double dx = x[i] - x[j], dy = y[i] - y[j], dz = z[i] - z[j];
            double r2 = dx * dx + dy * dy + dz * dz;
            r2 = r2 > 0.0 ? r2 : 1.0;
            double f = q[j] / (r2 * sqrt(r2));
            fx += f * dx;
            fy += f * dy;
            fz += f * dz;
        }
        ex[i] = fx;
        ey[i] = fy;
        ez[i] = fz;
    }
}

/* Fast charges that do not push each other, in a uniform magnet, a uniform electric field and a
 * static quadrupole: half a drift, the change of momentum of Higuera and Cary, half a drift.
 *   phi = -E x + (curvature / 2) (z^2 - (x^2 + y^2) / 2)
 * With curvature < 0 the electric fields are left out.
 */
void relativistic(long steps, int n, double *restrict x, double *restrict y, double *restrict z,
                  double *restrict ux, double *restrict uy, double *restrict uz, double ratio,
                  double magnet, double electric, double curvature, double h, double light)
{
    double half = 0.5 * h, push = 0.5 * h * ratio, b = push * magnet, b2 = b * b;
    double per_light2 = 1.0 / (light * light);
    for (long s = 0; s < steps; s++) {
        for (int i = 0; i < n; i++) {
            double vx = ux[i], vy = uy[i], vz = uz[i];
            double way = half / sqrt(1.0 + (vx * vx + vy * vy + vz * vz) * per_light2);
            double px = x[i] + way * vx, py = y[i] + way * vy, pz = z[i] + way * vz;
            double ex = 0.0, ey = 0.0, ez = 0.0;
            if (curvature >= 0.0) {
                ex = push * (electric + 0.5 * curvature * px);
                ey = push * 0.5 * curvature * py;
                ez = -push * curvature * pz;
            }
            vx += ex;
            vy += ey;
            vz += ez;
            double star = vz * b, square = b2 + star * star * per_light2;
            double sigma = 1.0 + (vx * vx + vy * vy + vz * vz) * per_light2 - b2;
            double g2 = 0.5 * (sigma + sqrt(sigma * sigma + 4.0 * square));
            double t = b / sqrt(g2), twice = 2.0 * t / (1.0 + t * t);
            double wx = vx + t * vy, wy = vy - t * vx;
            vx += twice * wy + ex;
            vy += -twice * wx + ey;
            vz += ez;
            way = half / sqrt(1.0 + (vx * vx + vy * vy + vz * vz) * per_light2);
            x[i] = px + way * vx;
            y[i] = py + way * vy;
            z[i] = pz + way * vz;
            ux[i] = vx;
            uy[i] = vy;
            uz[i] = vz;
        }
    }
}
