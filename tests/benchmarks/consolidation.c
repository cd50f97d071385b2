/* The consolidation kernel of probsoil/ground (_consolidation_kernel.py, _newton_kernel.py) once more, in C.
 *
 * A yardstick, not a part of the package: the same cells, steps, stages, Newton iterations,
 * stopping test per lane, limits on a change and conductances renewed at every iteration, written
 * the way C is written for speed. Lanes are innermost and each Newton iteration is two passes over
 * the cells: down, for resistances, the balance of water and elimination; up, for back substitution
 * and the new state. Row lengths are constants, pointers are `restrict`, and every loop over lanes
 * is marked for vectors (at -O3 alone gcc 12 unrolled most of them and left them scalar).
 *
 *     gcc -O3 -march=native -fopenmp-simd -shared -fPIC -DLANES=32 consolidation.c
 *
 * The logarithm and exponential are inline arithmetic like the package's. With -DLIBMVEC (and
 * -lmvec) they are those of the C library's vector mathematics, which took 1.4 times as long when
 * this was written (gcc 12.2, glibc 2.36, 512-bit vectors). -ffast-math is no option: it
 * simplifies the rounding by a large constant away.
 */

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#ifndef LANES
#define LANES 16
#endif

#define GAMMA (1.0 - 0.70710678118654752440)
#define BEYOND ((1.0 - GAMMA) / GAMMA)
#define TOLERANCE 1e-4
#define MOST_ITERATIONS 15
#define LEAST_STRESS 1e-3
#define LOG_LEAST_STRESS -6.907755278982137
#define LEAST_LOGARITHM -700.0
#define LEAST_VOID_RATIO 0.05
#define EACH_LANE _Pragma("omp simd") for (int l = 0; l < LANES; l++)

typedef double row[LANES];

/* Pointers to C-ordered arrays, shapes as in the Python kernel. */
typedef struct {
    int64_t n_block, n_cell, n_knot, n_step, n_slot, n_segment;
    /* soil (block, cell, lane) */
    const row *thickness, *stress, *yield_stress, *void_ratio, *lam, *kap, *log_conductivity, *decline, *radial;
    /* faces (cell,) */
    const double *follows;
    const int64_t *power;
    const uint8_t *joined;
    const double *drained;
    const int64_t *segment;
    /* loading: stress (block, knot, cell, lane), spreads (block, cell, lane), height (block, knot, lane), depth (block, lane),
       weight of fill that holds the level and gain (block, lane), granular (block, knot, lane) */
    const row *load, *spread, *fill_spread;
    const row *height;
    const row *water_depth;
    double water_weight;
    const row *fill_weight, *granular, *gain;
    /* schedule: (step,), (step, stage) */
    const double *step;
    const int64_t *knot;
    const double *weight;
    const int64_t *record;
    const uint8_t *drains, *held;
    /* answers: (block, segment, step, lane) of zeros, (block, slot, 2, cell, lane), (block, 2, lane) */
    row *settlement, *recorded;
    int64_t *failed;
} Problem;

/* One block's soil, state and scratch, arrays (cell, lane) or (lane,). */
typedef struct {
    const row *thickness, *stress, *void_ratio, *lam, *kap, *log_conductivity, *decline, *radial;
    row *s, *w, *xp, *wp, *rate, *mass, *peak;
    row *trial_s, *trial_x, *trial_w, *total, *target;
    row *between, *pivot, *above; /* of the face above each cell, and one more below the last */
    row sunk, sunk_rate, foreseen, live, worst;
    row fill, filling; /* thickness added so that the level stays, before the stage and in it */
} Block;

enum { SCRATCH_ARRAYS = 15 };

static inline double smaller(double a, double b) { return a < b ? a : b; }
static inline double larger(double a, double b) { return a > b ? a : b; }

#ifdef LIBMVEC
__attribute__((simd("notinbranch"), const)) double log(double);
__attribute__((simd("notinbranch"), const)) double exp(double);
#define natural_log log
#define exponential exp
#else
static inline uint64_t to_bits(double x)
{
    uint64_t bits;
    memcpy(&bits, &x, sizeof bits);
    return bits;
}

static inline double from_bits(uint64_t bits)
{
    double x;
    memcpy(&x, &bits, sizeof x);
    return x;
}

#define ONE UINT64_C(0x3FF0000000000000)
#define CENTRE (ONE - UINT64_C(0x3FE6A09E667F3BCD)) /* one less the square root of a half */
#define ROUNDER 6755399441055744.0                   /* 1.5 * 2^52 */
#define ROUNDER_BITS UINT64_C(0x4338000000000000)
#define LN2 0.69314718055994530942
#define LN2_HIGH 0x1.62e42feep-1
#define LN2_LOW 1.9082149292705877e-10

static inline double natural_log(double x)
{
    uint64_t bits = to_bits(x);
    uint64_t exponent = ((bits + CENTRE) >> 52) - 1023;
    double mantissa = from_bits(bits - (exponent << 52));
    double s = (mantissa - 1.0) / (mantissa + 1.0);
    double z = s * s;
    double series = 1.0 / 21.0;
    series = series * z + 1.0 / 19.0;
    series = series * z + 1.0 / 17.0;
    series = series * z + 1.0 / 15.0;
    series = series * z + 1.0 / 13.0;
    series = series * z + 1.0 / 11.0;
    series = series * z + 1.0 / 9.0;
    series = series * z + 1.0 / 7.0;
    series = series * z + 1.0 / 5.0;
    series = series * z + 1.0 / 3.0;
    double whole = from_bits(exponent + ROUNDER_BITS) - ROUNDER;
    return whole * LN2 + (2.0 * s + 2.0 * s * z * series);
}

static inline double exponential(double x)
{
    double rounded = x * (1.0 / LN2) + ROUNDER;
    double whole = rounded - ROUNDER;
    double rest = x - whole * LN2_HIGH;
    rest = rest - whole * LN2_LOW;
    double series = 1.0 / 6227020800.0;
    series = series * rest + 1.0 / 479001600.0;
    series = series * rest + 1.0 / 39916800.0;
    series = series * rest + 1.0 / 3628800.0;
    series = series * rest + 1.0 / 362880.0;
    series = series * rest + 1.0 / 40320.0;
    series = series * rest + 1.0 / 5040.0;
    series = series * rest + 1.0 / 720.0;
    series = series * rest + 1.0 / 120.0;
    series = series * rest + 1.0 / 24.0;
    series = series * rest + 1.0 / 6.0;
    series = series * rest + 0.5;
    series = series * rest + 1.0;
    series = series * rest + 1.0;
    return series * from_bits((to_bits(rounded) << 52) + ONE);
}
#endif

static void start(const Problem *p, int64_t b, Block *k)
{
    const row *yield_stress = p->yield_stress + b * p->n_cell;
    for (int64_t i = 0; i < p->n_cell; i++)
        EACH_LANE
        {
            double s = k->stress[i][l];
            double x = natural_log(s);
            double xp = natural_log(yield_stress[i][l]);
            k->s[i][l] = s;
            k->xp[i][l] = xp;
            k->wp[i][l] = k->kap[i][l] * (xp - x);
            k->w[i][l] = 0.0;
            k->rate[i][l] = 0.0;
            k->peak[i][l] = s;
            k->mass[i][l] = k->thickness[i][l] / (1.0 + k->void_ratio[i][l]);
        }
    EACH_LANE k->sunk[l] = k->sunk_rate[l] = k->fill[l] = 0.0;
}

static inline double log_stress(double s)
{
    return natural_log(larger(s, LEAST_STRESS)) + smaller(s * (1.0 / LEAST_STRESS) - 1.0, 0.0);
}

static inline double guess(double s, double change)
{
    double half = 0.5 * s, twice = 2.0 * s;
    return smaller(larger(s + change, smaller(half, twice)), larger(half, twice));
}

static inline void compress(double s, double *restrict x, double *restrict w, double xp, double wp, double lam,
                            double kap)
{
    *x = log_stress(s);
    double past = *x - xp;
    *w = wp + kap * smaller(past, 0.0) + lam * larger(past, 0.0);
}

/* Where the stage sets out from, first guess and state at the guess. */
static void set_out(const Problem *p, int stage, double length, Block *k)
{
    double span = GAMMA * length;
    row sum;
    EACH_LANE sum[l] = 0.0;
    for (int64_t i = 0; i < p->n_cell; i++) {
        const double *restrict s = k->s[i], *restrict w = k->w[i], *restrict xp = k->xp[i], *restrict wp = k->wp[i];
        const double *restrict mass = k->mass[i], *restrict lam = k->lam[i], *restrict kap = k->kap[i];
        double *restrict rate = k->rate[i], *restrict target = k->target[i];
        double *restrict trial_s = k->trial_s[i], *restrict trial_x = k->trial_x[i], *restrict trial_w = k->trial_w[i];
        if (stage == 0) {
            EACH_LANE
            {
                target[l] = w[l];
                trial_s[l] = guess(s[l], span * rate[l]);
                compress(trial_s[l], &trial_x[l], &trial_w[l], xp[l], wp[l], lam[l], kap[l]);
            }
        } else {
            EACH_LANE
            {
                double gained = trial_w[l] - w[l];
                target[l] = w[l] + BEYOND * gained;
                rate[l] = (trial_s[l] - s[l]) / span;
                sum[l] += mass[l] * gained;
                trial_s[l] = guess(s[l], length * rate[l]);
                compress(trial_s[l], &trial_x[l], &trial_w[l], xp[l], wp[l], lam[l], kap[l]);
            }
        }
    }
    EACH_LANE k->foreseen[l] = k->sunk[l] + (stage == 0 ? span * k->sunk_rate[l] : sum[l] / GAMMA);
}

/* Thickness of fill that keeps the level at a settlement of the clay. */
static void fill_up(const Problem *p, int64_t b, int64_t j, double share, const double *restrict sunk,
                    double *restrict fill)
{
    const row *before = p->granular + b * p->n_knot + j, *after = before + 1;
    EACH_LANE
    {
        double granular = (1.0 - share) * before[0][l] + share * after[0][l];
        fill[l] = larger(sunk[l] + granular, 0.0) * p->gain[b][l];
    }
}

static void add_load(const Problem *p, int64_t b, int64_t j, double share, Block *k)
{
    const row *height = p->height + b * p->n_knot + j;
    const row *before = p->load + (b * p->n_knot + j) * p->n_cell, *after = before + p->n_cell;
    const row *spread = p->spread + b * p->n_cell, *fill_spread = p->fill_spread + b * p->n_cell;
    row off, fill;
    EACH_LANE
    {
        double above_base = (1.0 - share) * height[0][l] + share * height[1][l] + k->filling[l];
        off[l] = p->water_weight * smaller(larger(k->foreseen[l], 0.0), p->water_depth[b][l] + above_base);
        fill[l] = k->filling[l] * p->fill_weight[b][l];
    }
    for (int64_t i = 0; i < p->n_cell; i++) {
        double *restrict total = k->total[i];
        EACH_LANE
        {
            double added = (1.0 - share) * before[i][l] + share * after[i][l];
            added += fill[l] * fill_spread[i][l];
            total[l] = k->stress[i][l] + added - smaller(off[l] * spread[i][l], larger(added, 0.0));
        }
    }
}

/* Conductance from a cell to its drained face, mean of the logarithms at the face and the centre. */
static void add_leak(const Problem *p, int64_t i, double span, const Block *k, double *restrict leak)
{
    double follows = 0.5 * p->follows[i], faces = p->drained[i];
    row voids, resistance;
    EACH_LANE
    {
        double x, face_w, xp = k->xp[i][l];
        compress(k->total[i][l], &x, &face_w, xp, k->wp[i][l], k->lam[i][l], k->kap[i][l]);
        double w = 0.5 * (k->trial_w[i][l] + face_w);
        double exponent = k->decline[i][l] * w - k->log_conductivity[i][l];
        exponent += follows * (larger(k->trial_x[i][l], xp) + larger(x, xp));
        voids[l] = 1.0 + k->void_ratio[i][l] - w;
        resistance[l] = exponential(exponent) * k->thickness[i][l] / (2.0 * span);
    }
    for (int64_t n = 0; n < p->power[i]; n++)
        EACH_LANE resistance[l] *= voids[l];
    EACH_LANE leak[l] += faces / resistance[l];
}

/* Down the cells: resistances, imbalance of water and its derivative, elimination. */
static void pass_down(const Problem *p, double span, int drains, Block *k)
{
    row own, resistance_above, excess_above, diagonal, change, leak;
    int64_t n_cell = p->n_cell;
    EACH_LANE
    {
        resistance_above[l] = diagonal[l] = 1.0;
        excess_above[l] = change[l] = 0.0;
    }
    for (int64_t i = 0; i < n_cell; i++) {
        const double *restrict x = k->trial_x[i], *restrict w = k->trial_w[i], *restrict s = k->trial_s[i];
        const double *restrict xp = k->xp[i], *restrict e = k->void_ratio[i], *restrict mass = k->mass[i];
        const double *restrict total = k->total[i], *restrict target = k->target[i];
        const double *restrict lam = k->lam[i], *restrict kap = k->kap[i], *restrict thickness = k->thickness[i];
        const double *restrict log_conductivity = k->log_conductivity[i], *restrict decline = k->decline[i];
        const double *restrict radial = k->radial[i];
        double *restrict between = k->between[i], *restrict pivot = k->pivot[i], *restrict above = k->above[i];
        double follows = p->follows[i], joined = p->joined[i] ? 1.0 : 0.0;
        EACH_LANE
        {
            double held = w[l] + kap[l] * larger(LOG_LEAST_STRESS - x[l], 0.0);
            double exponent = decline[l] * held - log_conductivity[l] + follows * larger(x[l], xp[l]);
            own[l] = exponential(exponent) * thickness[l] / (2.0 * span);
        }
        for (int64_t n = 0; n < p->power[i]; n++)
            EACH_LANE own[l] *= 1.0 + e[l] - w[l];
        EACH_LANE leak[l] = 0.0;
        if (drains)
            EACH_LANE
            {
                double shortened = (1.0 + e[l] - w[l]) / (1.0 + e[l]);
                leak[l] = radial[l] * shortened * shortened / own[l];
            }
        if (p->drained[i] > 0.0)
            add_leak(p, i, span, k, leak);
        EACH_LANE
        {
            double excess = total[l] - s[l];
            double g = joined / (resistance_above[l] + own[l]);
            double flow = g * (excess - excess_above[l]);
            double reciprocal = 1.0 / (diagonal[l] + g);
            double rest = diagonal[l] * reciprocal;
            double slope = x[l] >= xp[l] ? lam[l] : kap[l];
            between[l] = g;
            pivot[l] = reciprocal;
            above[l] = change[l] + flow;
            double inflow = g * reciprocal * change[l] - rest * flow;
            change[l] = mass[l] * (w[l] - target[l]) - leak[l] * excess + inflow;
            diagonal[l] = mass[l] * slope / larger(s[l], LEAST_STRESS) + leak[l] + rest * g;
            resistance_above[l] = own[l];
            excess_above[l] = excess;
        }
    }
    EACH_LANE
    {
        k->pivot[n_cell][l] = 1.0 / diagonal[l];
        k->above[n_cell][l] = change[l];
    }
}

/* Up the cells: back substitution, new stress in the lanes still iterating, state there. */
static int pass_up(const Problem *p, Block *k)
{
    row below, worst;
    EACH_LANE below[l] = worst[l] = 0.0;
    for (int64_t i = p->n_cell - 1; i >= 0; i--) {
        const double *restrict pivot = k->pivot[i + 1], *restrict above = k->above[i + 1];
        const double *restrict xp = k->xp[i], *restrict wp = k->wp[i], *restrict lam = k->lam[i];
        const double *restrict kap = k->kap[i], *restrict live = k->live, *restrict between = k->between[i];
        double *restrict s = k->trial_s[i], *restrict x = k->trial_x[i], *restrict w = k->trial_w[i];
        EACH_LANE
        {
            double delta = (above[l] + below[l]) * pivot[l];
            double old = s[l];
            double lowest = old > LEAST_STRESS ? 0.2 * old : -INFINITY;
            double new = larger(old - live[l] * delta, lowest);
            double moved = new > old ? new - old : old - new;
            worst[l] = larger(worst[l], moved - TOLERANCE * larger(new, LEAST_STRESS));
            s[l] = new;
            compress(new, &x[l], &w[l], xp[l], wp[l], lam[l], kap[l]);
            below[l] = between[l] * delta;
        }
    }
    double going = 0.0;
    EACH_LANE
    {
        k->worst[l] = worst[l];
        k->live[l] = worst[l] > 0.0 ? 1.0 : 0.0;
        going = larger(going, k->live[l]);
    }
    return going > 0.0;
}

static void finish(const Problem *p, double length, Block *k)
{
    row sum;
    EACH_LANE sum[l] = 0.0;
    for (int64_t i = 0; i < p->n_cell; i++) {
        const double *restrict trial_s = k->trial_s[i], *restrict total = k->total[i], *restrict lam = k->lam[i];
        const double *restrict mass = k->mass[i], *restrict trial_w = k->trial_w[i], *restrict trial_x = k->trial_x[i];
        double *restrict s = k->s[i], *restrict w = k->w[i], *restrict xp = k->xp[i], *restrict wp = k->wp[i];
        double *restrict rate = k->rate[i], *restrict peak = k->peak[i];
        EACH_LANE
        {
            peak[l] = larger(peak[l], total[l]);
            sum[l] += mass[l] * trial_w[l];
            rate[l] = (trial_s[l] - s[l]) / length;
            s[l] = trial_s[l];
            w[l] = trial_w[l];
            double further = larger(smaller(trial_x[l], natural_log(peak[l])) - xp[l], 0.0);
            wp[l] += lam[l] * further;
            xp[l] += further;
        }
    }
    EACH_LANE
    {
        k->sunk_rate[l] = (sum[l] - k->sunk[l]) / length;
        k->sunk[l] = sum[l];
    }
}

static void march(const Problem *p, int64_t b, Block *k)
{
    int64_t n_cell = p->n_cell, *failed = p->failed + b * 2 * LANES;
    start(p, b, k);
    for (int64_t n = 0; n < p->n_step; n++) {
        double length = p->step[n], span = GAMMA * length;
        for (int stage = 0; stage < 2; stage++) {
            set_out(p, stage, length, k);
            int64_t j = p->knot[2 * n + stage];
            double share = p->weight[2 * n + stage];
            if (p->held[n])
                fill_up(p, b, j, share, k->foreseen, k->filling);
            else
                memcpy(k->filling, k->fill, sizeof(row));
            add_load(p, b, j, share, k);
            EACH_LANE k->live[l] = 1.0;
            for (int round = 0; round < MOST_ITERATIONS; round++) {
                pass_down(p, span, p->drains[n], k);
                if (!pass_up(p, k))
                    break;
            }
            EACH_LANE failed[l] += !(k->worst[l] <= 0.0);
        }
        for (int64_t i = 0; i < n_cell; i++)
            EACH_LANE failed[LANES + l] += k->void_ratio[i][l] - k->trial_w[i][l] < LEAST_VOID_RATIO;
        finish(p, length, k);
        if (p->held[n])
            fill_up(p, b, p->knot[2 * n + 1], p->weight[2 * n + 1], k->sunk, k->fill);
        for (int64_t i = 0; i < n_cell; i++) {
            double *restrict sum = p->settlement[(b * p->n_segment + p->segment[i]) * p->n_step + n];
            EACH_LANE sum[l] += k->mass[i][l] * k->w[i][l];
        }
        if (p->record[n] >= 0) {
            row *kept = p->recorded + (b * p->n_slot + p->record[n]) * 2 * n_cell;
            for (int64_t i = 0; i < n_cell; i++)
                EACH_LANE
                {
                    double s = k->s[i][l];
                    kept[i][l] = s > LEAST_STRESS ? s : exponential(larger(k->trial_x[i][l], LEAST_LOGARITHM));
                    kept[n_cell + i][l] = exponential(k->xp[i][l]);
                }
        }
    }
}

/* Returns 0, or 1 where there was no memory for the scratch. */
int consolidate(const Problem *p)
{
    int64_t n_cell = p->n_cell;
    row *scratch = aligned_alloc(64, SCRATCH_ARRAYS * (n_cell + 1) * sizeof(row));
    if (scratch == NULL)
        return 1;
    memset(scratch, 0, SCRATCH_ARRAYS * (n_cell + 1) * sizeof(row));
    row *part[SCRATCH_ARRAYS];
    for (int n = 0; n < SCRATCH_ARRAYS; n++)
        part[n] = scratch + n * (n_cell + 1);
    for (int64_t b = 0; b < p->n_block; b++) {
        int64_t at = b * n_cell;
        Block k = {
            .thickness = p->thickness + at, .stress = p->stress + at, .void_ratio = p->void_ratio + at,
            .lam = p->lam + at, .kap = p->kap + at, .log_conductivity = p->log_conductivity + at,
            .decline = p->decline + at, .radial = p->radial + at,
            .s = part[0], .w = part[1], .xp = part[2], .wp = part[3], .rate = part[4], .mass = part[5],
            .peak = part[6], .trial_s = part[7], .trial_x = part[8], .trial_w = part[9], .total = part[10],
            .target = part[11], .between = part[12], .pivot = part[13], .above = part[14],
        };
        march(p, b, &k);
    }
    free(scratch);
    return 0;
}
