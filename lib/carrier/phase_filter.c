#include "mirrorband/carrier.h"

/*
 * A Kalman filter of three states, phase, frequency and drift, written out for its fixed size. The covariance
 * is kept as its upper triangle: pp, pf, pd, ff, fd, dd.
 */
enum { PP, PF, PD, FF, FD, DD };

static int upper_index(int row, int column)
{
    static const int index[3][3] = {{PP, PF, PD}, {PF, FF, FD}, {PD, FD, DD}};

    return index[row][column];
}

/* Covariance moved by dt without process noise: F P F'. */
static void carry_covariance(const double *p, double dt, double *out)
{
    double h = 0.5 * dt * dt;
    /* rows of F P */
    double a0 = p[PP] + dt * p[PF] + h * p[PD], a1 = p[PF] + dt * p[FF] + h * p[FD],
           a2 = p[PD] + dt * p[FD] + h * p[DD];
    double b1 = p[FF] + dt * p[FD], b2 = p[FD] + dt * p[DD];

    out[PP] = a0 + dt * a1 + h * a2;
    out[PF] = a1 + dt * a2;
    out[PD] = a2;
    out[FF] = b1 + dt * b2;
    out[FD] = b2;
    out[DD] = p[DD];
}

static void carry_state(mb_phase_state *state, double dt)
{
    state->phase_rad += dt * (state->frequency_rad_s + 0.5 * dt * state->drift_rad_s2);
    state->frequency_rad_s += dt * state->drift_rad_s2;
}

void mb_phase_predict(mb_phase_state *state, const mb_phase_noise *noise, double dt_s)
{
    double carried[6];
    double t = dt_s < 0.0 ? -dt_s : dt_s;
    double sign = dt_s < 0.0 ? -1.0 : 1.0;
    double qf = noise->frequency_rad2_s3, qd = noise->drift_rad2_s5;
    double t2 = t * t, t3 = t2 * t;

    carry_covariance(state->covariance, dt_s, carried);
    carry_state(state, dt_s);
    /* integrals of white noise driving phase, frequency and drift over the time t */
    carried[PP] += noise->phase_rad2_s * t + qf * t3 / 3.0 + qd * t3 * t2 / 20.0;
    carried[PF] += sign * (qf * t2 / 2.0 + qd * t2 * t2 / 8.0);
    carried[PD] += qd * t3 / 6.0;
    carried[FF] += qf * t + qd * t3 / 3.0;
    carried[FD] += sign * qd * t2 / 2.0;
    carried[DD] += qd * t;
    for (int i = 0; i < 6; i++) {
        state->covariance[i] = carried[i];
    }
}

void mb_phase_update(mb_phase_state *state, double innovation_rad, double variance_rad2)
{
    double *p = state->covariance;
    double total = p[PP] + variance_rad2;
    double gain[3] = {p[PP] / total, p[PF] / total, p[PD] / total};

    state->phase_rad += gain[0] * innovation_rad;
    state->frequency_rad_s += gain[1] * innovation_rad;
    state->drift_rad_s2 += gain[2] * innovation_rad;
    double pp = p[PP], pf = p[PF], pd = p[PD];
    p[PP] = pp * variance_rad2 / total;
    p[PF] = pf * variance_rad2 / total;
    p[PD] = pd * variance_rad2 / total;
    p[FF] -= gain[1] * pf;
    p[FD] -= gain[1] * pd;
    p[DD] -= gain[2] * pd;
}

static void invert(const double *p, double *out)
{
    double c0 = p[FF] * p[DD] - p[FD] * p[FD];
    double c1 = p[PD] * p[FD] - p[PF] * p[DD];
    double c2 = p[PF] * p[FD] - p[PD] * p[FF];
    double scale = 1.0 / (p[PP] * c0 + p[PF] * c1 + p[PD] * c2);

    out[PP] = c0 * scale;
    out[PF] = c1 * scale;
    out[PD] = c2 * scale;
    out[FF] = (p[PP] * p[DD] - p[PD] * p[PD]) * scale;
    out[FD] = (p[PF] * p[PD] - p[PP] * p[FD]) * scale;
    out[DD] = (p[PP] * p[FF] - p[PF] * p[PF]) * scale;
}

/* Smoother gain G = P F' inverse(P-), rows of the filtered state. */
static void smoother_gain(const double *p, const double *predicted, double dt, double gain[3][3])
{
    double inverse[6], h = 0.5 * dt * dt;

    invert(predicted, inverse);
    for (int row = 0; row < 3; row++) {
        double a = p[upper_index(row, 0)], b = p[upper_index(row, 1)], c = p[upper_index(row, 2)];
        double turned[3] = {a + dt * b + h * c, b + dt * c, c}; /* row of P F' */
        for (int column = 0; column < 3; column++) {
            gain[row][column] = 0.0;
            for (int k = 0; k < 3; k++) {
                gain[row][column] += turned[k] * inverse[upper_index(k, column)];
            }
        }
    }
}

void mb_phase_smooth(mb_phase_state *filtered, const mb_phase_noise *noise, double dt_s,
                     const mb_phase_state *later)
{
    mb_phase_state predicted = *filtered;
    double gain[3][3], half[3][3];

    mb_phase_predict(&predicted, noise, dt_s);
    smoother_gain(filtered->covariance, predicted.covariance, dt_s, gain);
    double step[3] = {later->phase_rad - predicted.phase_rad,
                      later->frequency_rad_s - predicted.frequency_rad_s,
                      later->drift_rad_s2 - predicted.drift_rad_s2};
    filtered->phase_rad += gain[0][0] * step[0] + gain[0][1] * step[1] + gain[0][2] * step[2];
    filtered->frequency_rad_s += gain[1][0] * step[0] + gain[1][1] * step[1] + gain[1][2] * step[2];
    filtered->drift_rad_s2 += gain[2][0] * step[0] + gain[2][1] * step[1] + gain[2][2] * step[2];
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j < 3; j++) {
            half[i][j] = 0.0;
            for (int k = 0; k < 3; k++) {
                int at = upper_index(k, j);
                half[i][j] += gain[i][k] * (later->covariance[at] - predicted.covariance[at]);
            }
        }
    }
    for (int i = 0; i < 3; i++) {
        for (int j = i; j < 3; j++) {
            double sum = 0.0;
            for (int k = 0; k < 3; k++) {
                sum += half[i][k] * gain[j][k];
            }
            filtered->covariance[upper_index(i, j)] += sum;
        }
    }
}
