/* The sampled cascade around a rigid train in plain C: the law of the compiled kernel, written again to measure it.

   The exact steps over the two segments of a tick come in ready made; everything else is done here: encoder, window
   and filter, both PI controllers with their integrator and windup rules, delays, clamps, Coulomb friction with its
   starts and stops, the energy given back, the traces. */
#include <math.h>
#include <stdlib.h>

enum { BACKWARD, FORWARD, TRAPEZOID };
enum { TERMS = 64, HALVINGS = 52, EVENTS = 32, PARTS = 8 };

typedef struct { double kp, ki_period, weight, relief; long rule, hold; } law_t;
typedef struct { double integral, error; } pi_t;
typedef struct { double value; int clamped; } output_t;
typedef struct { double i, w, f, a; } state_t;
typedef struct { double i[4], w[4], f[4], a[4], q[4], f_self, width; } step_t; /* of i, w, v, drag */

typedef struct {
    long ticks, divisor, held_ticks, reference_delay, window, reference_tick, stop_tick, load_tick, terms, filtered;
    double period, held_part, counts_per_radian, filter_gain, feedforward, current_limit, voltage_limit, reactance;
    double reference, reference_at, ramp, stop_at, stop_ramp, stop_size;
    double start_current, start_voltage;
    double ii, iw, iv, wi, ww, wd, fi, ff;
    double drag[2][2]; /* without and with the load step; backwards and forwards */
    law_t current, speed;
    step_t step[2][2]; /* segment; moving and resting */
} run_t;

typedef struct { double peak_current, squares, peak_voltage, current_clamps, voltage_clamps, returned; } tally_t;
typedef struct { double i[TERMS], w[TERMS], f[TERMS], a[TERMS], q[TERMS]; } series_t;

static inline output_t pi_step(const law_t *law, pi_t *s, double reference, double measured, double addend, double limit)
{
    const double error = reference - measured;
    const double proportional = law->kp * (law->weight * reference - measured);
    double integral, total;
    if (law->rule == BACKWARD) {
        integral = s->integral + law->ki_period * error;
        total = proportional + integral;
    } else if (law->rule == FORWARD) {
        integral = s->integral + law->ki_period * error;
        total = proportional + s->integral;
    } else {
        integral = s->integral + law->ki_period * (error + s->error) * 0.5;
        total = proportional + integral;
    }
    total += addend;
    double value = total;
    if (value > limit)
        value = limit;
    if (value < -limit)
        value = -limit;
    const int clamped = value != total;
    if (clamped) {
        if (law->hold) {
            if (error * total > 0.0)
                integral = s->integral;
        } else {
            integral += law->relief * (value - total);
        }
    }
    s->integral = integral;
    s->error = error;
    return (output_t){value, clamped};
}

static double reference_of(const run_t *r, long tick, double time)
{
    double size = 0.0;
    if (tick < r->reference_tick)
        return 0.0;
    if (tick >= r->stop_tick) {
        if (r->stop_ramp > 0.0)
            size = fmax(0.0, r->stop_size - r->stop_ramp * fmax(0.0, time - r->stop_at));
    } else {
        size = fabs(r->reference);
        if (r->ramp > 0.0)
            size = fmin(size, r->ramp * fmax(0.0, time - r->reference_at));
    }
    return r->reference >= 0.0 ? size : -size;
}

static inline double change(const double *row, state_t x, double voltage, double drag)
{
    return row[0] * x.i + row[1] * x.w + row[2] * voltage + row[3] * drag;
}

static inline state_t stride(const run_t *r, const step_t *s, state_t x, double voltage, double drag)
{
    state_t y = x;
    if (r->filtered)
        y.f = x.f + (s->f_self * x.f + change(s->f, x, voltage, drag));
    y.i = x.i + change(s->i, x, voltage, drag);
    y.w = x.w + change(s->w, x, voltage, drag);
    y.a = x.a + change(s->a, x, voltage, drag);
    return y;
}

static inline double pull(const run_t *r, state_t x) { return r->wi * x.i + r->ww * x.w; }

static inline int start_way(const run_t *r, const double *drag, state_t x)
{
    const double drive = pull(r, x), forwards = -r->wd * drag[1], backwards = -r->wd * drag[0];
    if (drive - forwards > 1e-12 * fabs(forwards))
        return 1;
    if (drive - backwards < -1e-12 * fabs(backwards))
        return -1;
    return 0;
}

static inline int in_mode(const run_t *r, const double *drag, int heading, state_t x)
{
    if (!(drag[1] > drag[0]))
        return 1;
    if (heading == 0)
        return start_way(r, drag, x) == 0;
    return !(x.w * heading < 0.0);
}

static inline int eventless(const run_t *r, const double *drag, int heading, state_t x, state_t y, double u, double time)
{
    if (!in_mode(r, drag, heading, y))
        return 0;
    if (drag[1] > drag[0] && heading != 0 && (x.w + (pull(r, x) + r->wd * u) * time) * heading < 0.0)
        return 0;
    return 1;
}

static void build_series(const run_t *r, series_t *c, int resting, state_t x, double voltage, double drag, double width)
{
    double i = x.i, w = x.w, f = x.f, pushed = r->iv * voltage, dragged = r->wd * drag;
    c->i[0] = i, c->w[0] = w, c->f[0] = f, c->a[0] = x.a, c->q[0] = 0.0;
    for (long n = 1; n < r->terms; n++) {
        const double share = width / n;
        const double di = r->ii * i + r->iw * w + pushed;
        const double dw = resting ? 0.0 : r->wi * i + r->ww * w + dragged;
        const double df = r->fi * i + r->ff * f;
        c->a[n] = share * w, c->q[n] = share * i;
        i = share * di, w = share * dw, f = share * df;
        c->i[n] = i, c->w[n] = w, c->f[n] = f;
        pushed = dragged = 0.0;
    }
}

static double value_at(const double *c, long terms, double share)
{
    double value = 0.0;
    for (long n = terms - 1; n > 0; n--)
        value = (value + c[n]) * share;
    return value + c[0];
}

static double slope_at(const double *c, long terms, double share)
{
    double value = 0.0;
    for (long n = terms - 1; n > 0; n--)
        value = value * share + n * c[n];
    return value;
}

static state_t state_at(const run_t *r, const series_t *c, double share)
{
    return (state_t){value_at(c->i, r->terms, share), value_at(c->w, r->terms, share),
                     r->filtered ? value_at(c->f, r->terms, share) : 0.0, value_at(c->a, r->terms, share)};
}

static double turning_point(const double *c, long terms, double end)
{
    const double before = c[1];
    if (before * slope_at(c, terms, end) >= 0.0)
        return end;
    double low = 0.0, high = end;
    for (int n = 0; n < HALVINGS; n++) {
        const double middle = 0.5 * (low + high);
        if (slope_at(c, terms, middle) * before > 0.0)
            low = middle;
        else
            high = middle;
    }
    return high;
}

static double zero_between(const double *c, long terms, double low, double high)
{
    const double before = value_at(c, terms, low), after = value_at(c, terms, high);
    const int rising = after > before;
    double share = low + (high - low) * before / (before - after);
    for (int n = 0; n < HALVINGS; n++) {
        const double value = value_at(c, terms, share);
        if ((value > 0.0) == rising)
            high = share;
        else
            low = share;
        const double slope = slope_at(c, terms, share);
        const double closer = slope != 0.0 ? share - value / slope : low;
        if (fabs(closer - share) < 1e-15)
            break;
        share = low < closer && closer < high ? closer : 0.5 * (low + high);
    }
    return share;
}

static double series_energy(const series_t *c, long terms, double voltage, double end)
{
    if (voltage == 0.0)
        return 0.0;
    const double turn = turning_point(c->i, terms, end);
    double given = 0.0, charge = 0.0, low = 0.0, current = c->i[0];
    for (int part = 0; part < 2; part++) {
        const double high = part == 0 ? turn : end;
        if (high > low) {
            const double after = value_at(c->i, terms, high), total = value_at(c->q, terms, high);
            if (current * after < 0.0) {
                const double middle = value_at(c->q, terms, zero_between(c->i, terms, low, high));
                given += fmax(0.0, -voltage * (middle - charge));
                charge = middle;
            }
            given += fmax(0.0, -voltage * (total - charge));
            low = high, charge = total, current = after;
        }
    }
    return given;
}

static inline int sign_kept(const run_t *r, state_t x, state_t y, double voltage, double time)
{
    const double ahead = x.i + (r->ii * x.i + r->iw * x.w + r->iv * voltage) * time;
    const double before = voltage * x.i, after = voltage * y.i, aimed = voltage * ahead;
    if (before >= 0.0 && after >= 0.0 && aimed >= 0.0)
        return 1;
    return before <= 0.0 && after <= 0.0 && aimed <= 0.0 ? -1 : 0;
}

static double event_share(const run_t *r, const series_t *c, const double *drag, int heading, state_t x, double u,
                          double width)
{
    if (eventless(r, drag, heading, x, state_at(r, c, 1.0), u, width))
        return 2.0;
    double low = 0.0, high = 0.0;
    for (int part = 1; part <= PARTS; part++) {
        low = high, high = (double)part / PARTS;
        if (!in_mode(r, drag, heading, state_at(r, c, high)))
            break;
        if (part == PARTS)
            return 2.0;
    }
    for (int n = 0; n < HALVINGS; n++) {
        const double middle = 0.5 * (low + high);
        if (in_mode(r, drag, heading, state_at(r, c, middle)))
            low = middle;
        else
            high = middle;
    }
    return high;
}

static int depart(const run_t *r, const double *drag, state_t x)
{
    if (!(drag[1] > drag[0]))
        return 1;
    if (x.w == 0.0)
        return start_way(r, drag, x);
    return x.w > 0.0 ? 1 : -1;
}

static double travel(const run_t *r, const double *drag, double width, int *heading, state_t *x, double voltage)
{
    series_t c;
    double part = 1.0, given = 0.0;
    int events = 0;
    *heading = depart(r, drag, *x);
    while (part > 0.0) {
        const double u = *heading < 0 ? drag[0] : drag[1];
        build_series(r, &c, *heading == 0, *x, voltage, u, width * part);
        const double share = events > EVENTS ? 2.0 : event_share(r, &c, drag, *heading, *x, u, width * part);
        const double end = fmin(share, 1.0);
        given += series_energy(&c, r->terms, voltage, end);
        *x = state_at(r, &c, end);
        if (share > 1.0)
            break;
        part *= 1.0 - share;
        events++;
        if (drag[1] > drag[0] && (x->w * *heading < 0.0 || (events > EVENTS && fabs(x->w) < 1e-6)))
            *heading = 0, x->w = 0.0;
        if (events <= EVENTS)
            *heading = depart(r, drag, *x);
    }
    if (drag[1] > drag[0] && x->w * *heading < 0.0)
        *heading = 0, x->w = 0.0;
    return given;
}

/* traces: reference, speed, current, current reference, voltage, time, each ticks long; flags: current, voltage */
int respond(const run_t *restrict r, double *restrict traces, unsigned char *restrict flags, tally_t *restrict tally)
{
    const long n = r->ticks;
    double *restrict references = traces, *restrict speeds = traces + n, *restrict currents = traces + 2 * n;
    double *restrict current_references = traces + 3 * n, *restrict voltages = traces + 4 * n;
    double *restrict times = traces + 5 * n;
    double *counts = calloc((size_t)r->window, sizeof *counts);
    if (!counts)
        return 1;
    const int first_segment = r->held_part > 0.0 ? 0 : 1;
    const double *drag = r->drag[0];
    state_t x = {r->start_current, 0.0, r->filtered ? r->start_current : 0.0, 0.0};
    int heading = depart(r, drag, x), fresh = 1, current_clamped = 0;
    pi_t current_pi = {r->start_voltage, 0.0}, speed_pi = {r->start_current, 0.0};
    double newest = r->start_voltage, held = newest, older = newest, oldest = newest;
    double measured = 0.0, reference = 0.0, current_reference = r->start_current, next_reference = current_reference;
    const double per_count =
        r->counts_per_radian > 0.0 ? 1.0 / (r->counts_per_radian * r->window * r->divisor * r->period) : 0.0;
    double peak_current = 0.0, squares = 0.0, peak_voltage = 0.0, given = 0.0;
    long counted = 0, current_clamps = 0, voltage_clamps = 0, to_speed_tick = 0;
    for (long tick = 0; tick < n; tick++) {
        if (to_speed_tick == 0) {
            to_speed_tick = r->divisor;
            double raw = x.w;
            if (r->counts_per_radian > 0.0) {
                const double count = floor(x.a * r->counts_per_radian + 0.5);
                raw = (count - counts[counted]) * per_count;
                counts[counted] = count;
                if (++counted == r->window)
                    counted = 0;
            }
            measured += r->filter_gain * (raw - measured);
            reference = reference_of(r, tick, tick * r->period);
            const output_t asked = pi_step(&r->speed, &speed_pi, reference, measured, 0.0, r->current_limit);
            next_reference = asked.value;
            current_clamped = asked.clamped;
            current_clamps += asked.clamped;
        }
        if (r->divisor - to_speed_tick == r->reference_delay)
            current_reference = next_reference;
        to_speed_tick--;

        const double sample = r->filtered ? x.f : x.i;
        double room = r->voltage_limit;
        if (r->reactance != 0.0) {
            const double across = r->reactance * measured * sample;
            const double square = room * room - across * across;
            room = square > 0.0 ? sqrt(square) : 0.0;
        }
        const output_t output =
            pi_step(&r->current, &current_pi, current_reference, sample, r->feedforward * measured, room);
        oldest = older, older = held, held = newest, newest = output.value;
        voltage_clamps += output.clamped;

        references[tick] = reference;
        speeds[tick] = x.w;
        currents[tick] = x.i;
        current_references[tick] = current_reference;
        voltages[tick] = output.value;
        times[tick] = tick * r->period;
        flags[tick] = (unsigned char)current_clamped;
        flags[n + tick] = (unsigned char)output.clamped;
        peak_current = fabs(x.i) > peak_current ? fabs(x.i) : peak_current;
        peak_voltage = fabs(output.value) > peak_voltage ? fabs(output.value) : peak_voltage;
        squares += x.i * x.i;

        if (tick == r->load_tick)
            drag = r->drag[1], fresh = 1;
        for (int segment = first_segment; segment < 2; segment++) {
            const double voltage = r->held_ticks == 0   ? (segment ? newest : held)
                                   : r->held_ticks == 1 ? (segment ? held : older)
                                                        : (segment ? older : oldest);
            const step_t *step = &r->step[segment][heading == 0];
            if (!fresh) {
                const double u = heading < 0 ? drag[0] : drag[1];
                const state_t y = stride(r, step, x, voltage, u);
                if (eventless(r, drag, heading, x, y, u, step->width)) {
                    const int kept = sign_kept(r, x, y, voltage, step->width);
                    if (kept < 0) {
                        given -= voltage * change(step->q, x, voltage, u);
                    } else if (kept == 0) {
                        series_t c;
                        build_series(r, &c, heading == 0, x, voltage, u, step->width);
                        given += series_energy(&c, r->terms, voltage, 1.0);
                    }
                    x = y;
                    continue;
                }
            }
            given += travel(r, drag, step->width, &heading, &x, voltage);
            fresh = 0;
        }
    }
    *tally = (tally_t){peak_current, squares, peak_voltage, (double)current_clamps, (double)voltage_clamps, given};
    free(counts);
    return 0;
}
