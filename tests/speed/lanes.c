/* One reaction wheel, 64 trials side by side, by hand: what the lanes of the kernel are measured against.
   The same work: gravity's sine, drag, current loop with voltage, current, torque and speed limits, RK4, a sampled law on lean,
   lean rate and wheel speed with one sample of latency, peaks and the end of each trial; with noise, gyro and tilt from a
   noisy inertial sensor and a complementary filter. Row-major arrays [row][lane]; the inner loops are plain so that the compiler makes vectors of them. */
#include <math.h>
#include <stdint.h>
#include <string.h>

#define L 64
enum { STIFF, PER_MASS, COUPLING, PER_OWN, SHARE, MOMENT, COULOMB, VISCOUS, MOST, SPEED_MOST, SPEED_GAIN, PER_TORQUE, PER_AMP,
       EMF, OHMS, PER_OHM, VOLTS, AMPS, LAG, FELL, NUMBERS };
typedef double row[L] __attribute__((aligned(64)));

static inline double least(double a, double b) { return a < b ? a : b; }
static inline double most(double a, double b) { return a > b ? a : b; }
static inline double within(double x, double low, double high) { return least(most(x, low), high); }

static inline double sine(double x)
{
    double q = x * x;
    double s = -1.0 / 5040 + q * (1.0 / 362880 + q * (-1.0 / 39916800 + q * (1.0 / 6227020800.0)));
    return x + x * q * (-1.0 / 6 + q * (1.0 / 120 + q * s));
}

static inline double cosine(double x)
{
    double q = x * x;
    double c = 1.0 / 40320 + q * (-1.0 / 3628800 + q * (1.0 / 479001600 + q * (-1.0 / 87178291200.0)));
    return 1.0 + q * (-0.5 + q * (1.0 / 24 + q * (-1.0 / 720 + q * c)));
}

static inline double uniform(uint64_t seed, uint64_t count)
{
    uint64_t z = seed + (count + 1) * 0x9E3779B97F4A7C15ull;
    z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9ull;
    z = (z ^ (z >> 27)) * 0x94D049BB133111EBull;
    z ^= z >> 31;
    return ((double)(int64_t)(z >> 11) + 0.5) * 0x1p-53;
}

static inline double logarithm(double x)
{
    int64_t bits, k; double m;
    memcpy(&bits, &x, 8);
    bits -= 0x3FE6A09E667F3BCDll;
    k = bits >> 52;
    bits = bits - (k << 52) + 0x3FE6A09E667F3BCDll;
    memcpy(&m, &bits, 8);
    double s = (m - 1) / (m + 1), q = s * s;
    double t = 1.0 / 13 + q * (1.0 / 15 + q * (1.0 / 17 + q / 19.0));
    t = 1.0 / 3 + q * (1.0 / 5 + q * (1.0 / 7 + q * (1.0 / 9 + q * (1.0 / 11 + q * t))));
    return (double)k * 0.6931471805599453 + 2 * s * (1 + q * t);
}

static inline double normal(uint64_t seed, long sample, int channel)
{
    double x = 3.141592653589793 * (uniform(seed, 8 * sample + 2 * channel + 1) - 0.5), q = x * x;
    double c = 1.0 / 20922789888000.0 + q * (-1.0 / 6402373705728000.0 + q * (1.0 / 2432902008176640000.0));
    c = -1.0 / 3628800 + q * (1.0 / 479001600 + q * (-1.0 / 87178291200.0 + q * c));
    c = 1 + q * (-0.5 + q * (1.0 / 24 + q * (-1.0 / 720 + q * (1.0 / 40320 + q * c))));
    return sqrt(-2 * logarithm(uniform(seed, 8 * sample + 2 * channel))) * (1 - 2 * c * c);
}

static inline double tilt(double across, double up)
{
    double z = across / (up + sqrt(across * across + up * up));
    z = z / (1 + sqrt(1 + z * z));
    z = z / (1 + sqrt(1 + z * z));
    double q = z * z;
    double t = -1.0 / 15 + q * (1.0 / 17 + q * (-1.0 / 19 + q / 21.0));
    t = -1.0 / 7 + q * (1.0 / 9 + q * (-1.0 / 11 + q * (1.0 / 13 + q * t)));
    return 8 * z * (1 + q * (-1.0 / 3 + q * (1.0 / 5 + q * t)));
}

#define P(k) p[k][l]
#define RATES(x, v, a, i, pp, aa, ii)                                                                          \
    double net##pp = P(PER_AMP) * (i) - (P(COULOMB) * within(a, -1, 1) + P(VISCOUS) * (a));                    \
    double pp = (P(STIFF) * sine(x) - P(SHARE) * net##pp) * P(PER_MASS);                                       \
    double aa = (net##pp - P(COUPLING) * pp) * P(PER_OWN);                                                     \
    double cap##pp = most(P(SPEED_GAIN) * (torque > 0 ? P(SPEED_MOST) - (a) : P(SPEED_MOST) + (a)), 0);        \
    double want##pp = within(torque, -cap##pp, cap##pp) * P(PER_TORQUE), emf##pp = P(EMF) * (a);               \
    double low##pp = within((-P(VOLTS) - emf##pp) * P(PER_OHM), -P(AMPS), P(AMPS));                            \
    double high##pp = within((P(VOLTS) - emf##pp) * P(PER_OHM), -P(AMPS), P(AMPS));                            \
    double ii = P(LAG) * (within(want##pp, low##pp, high##pp) - (i));

static void step(row *s, row *m, const row *p, const row asked, double h)
{
    for (int l = 0; l < L; l++) {
        double x = s[0][l], v = s[1][l], a = s[2][l], i = s[3][l], alive = m[0][l], d = h * alive, e = 0.5 * d;
        double torque = within(asked[l], -P(MOST), P(MOST));
        RATES(x, v, a, i, p1, a1, i1)
        double taken = P(SHARE) * netp1, stored = P(COUPLING) * a + P(MOMENT) * v, slack = 1e-9 * P(AMPS);
        int limited = (fabs(asked[l]) > P(MOST) * (1 + 1e-9)) | (fabs(torque) > capp1) | (wantp1 > highp1 + slack)
                      | (wantp1 < lowp1 - slack);
        m[1][l] = most(m[1][l], fabs(x));
        m[2][l] = most(m[2][l], fabs(v) * alive);
        m[3][l] = most(m[3][l], fabs(taken) * alive);
        m[4][l] = most(m[4][l], fabs(stored));
        m[5][l] = most(m[5][l], fabs(i) * alive);
        m[6][l] = most(m[6][l], i * (P(OHMS) * i + P(EMF) * a) * alive);
        m[7][l] += d * taken * taken;
        m[8][l] += limited ? d : 0.0;
        double v2 = v + e * p1;
        RATES(x + e * v, v2, a + e * a1, i + e * i1, p2, a2, i2)
        double v3 = v + e * p2;
        RATES(x + e * v2, v3, a + e * a2, i + e * i2, p3, a3, i3)
        double v4 = v + d * p3;
        RATES(x + d * v3, v4, a + d * a3, i + d * i3, p4, a4, i4)
        double sixth = d * (1.0 / 6);
        x += sixth * (v + 2 * (v2 + v3) + v4);
        s[0][l] = x;
        s[1][l] = v + sixth * (p1 + 2 * (p2 + p3) + p4);
        s[2][l] = a + sixth * (a1 + 2 * (a2 + a3) + a4);
        s[3][l] = i + sixth * (i1 + 2 * (i2 + i3) + i4);
        m[0][l] = fabs(x) > P(FELL) ? 0.0 : alive;
    }
}

/* numbers (NUMBERS, n), states (4, n) changed to the end, out (9, n): alive, then the metrics; law: three gains, the limit,
   noise of gyro and accelerometer, height of the sensor, g, share of the gyro in the filter. n is a multiple of 64. */
void run(const double *numbers, double *states, double *out, long n, long periods, int steps, double h, const double *law,
         long seed)
{
    row p[NUMBERS], s[4], m[9], y[3], asked, next, shown[2], lean;
    for (long first = 0; first < n; first += L) {
        for (int k = 0; k < NUMBERS; k++) memcpy(p[k], numbers + k * n + first, sizeof(row));
        for (int k = 0; k < 4; k++) memcpy(s[k], states + k * n + first, sizeof(row));
        memset(m, 0, sizeof m); memset(next, 0, sizeof next);
        for (int l = 0; l < L; l++) { m[0][l] = 1.0; lean[l] = s[0][l]; }
        for (long k = 0; k < periods; k++) {
            for (int l = 0; l < L; l++) { y[0][l] = s[0][l]; y[1][l] = s[1][l]; y[2][l] = s[2][l]; asked[l] = next[l]; }
            if (law[4] > 0) {
                for (int l = 0; l < L; l++) {
                    shown[0][l] = law[5] * normal(seed + first + l, k, 1);
                    shown[1][l] = law[5] * normal(seed + first + l, k, 2);
                }
                for (int l = 0; l < L; l++) y[1][l] += law[4] * normal(seed + first + l, k, 0);
                for (int l = 0; l < L; l++) {
                    double a = s[2][l], v = s[1][l];
                    double net = P(PER_AMP) * s[3][l] - (P(COULOMB) * within(a, -1, 1) + P(VISCOUS) * a);
                    double acc = (P(STIFF) * sine(s[0][l]) - P(SHARE) * net) * P(PER_MASS);
                    double across = law[6] * acc - law[7] * sine(s[0][l]) + shown[0][l];
                    double up = law[7] * cosine(s[0][l]) - law[6] * v * v + shown[1][l];
                    lean[l] = law[8] * (lean[l] + steps * h * y[1][l]) + (1 - law[8]) * tilt(-across, up);
                    y[0][l] = lean[l];
                }
            }
            for (int l = 0; l < L; l++)
                next[l] = within(law[0] * y[0][l] + law[1] * y[1][l] + law[2] * y[2][l], -law[3], law[3]);
            for (int j = 0; j < steps; j++) step(s, m, p, asked, h);
        }
        for (int k = 0; k < 4; k++) memcpy(states + k * n + first, s[k], sizeof(row));
        for (int k = 0; k < 9; k++) memcpy(out + k * n + first, m[k], sizeof(row));
    }
}
