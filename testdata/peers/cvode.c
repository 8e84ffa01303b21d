/* The problems P1, P2 and P3 of README.md through CVODE of SUNDIALS 6, by its band solver.
 *
 *   cvode tune                          the tolerance that each problem, variant and error asks for
 *   cvode time PROBLEM VARIANT RTOL     microseconds of processor time per path
 *   cvode profile PROBLEM CELLS         the profile at the end, integrated to 1e-9
 *
 * All is in um, years and K. The concentrations c of equal cells, from the centre outwards, obey
 *
 *   v dc/dt = J(inner face) - J(outer face),  J = g(T) d area ((c - C)/h + (c + C)/2 * A/(R T) * slope of X),
 *
 * C that of the next cell, h the distance of the two, d what D has at the face besides g. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include <cvode/cvode.h>
#include <nvector/nvector_serial.h>
#include <sunlinsol/sunlinsol_band.h>
#include <sunmatrix/sunmatrix_band.h>

#define GAS 8.314462618     /* J/(mol K) */
#define ZERO 273.15         /* K */
#define YEAR 31557600.0     /* s */
#define COUPLING (-26700.0) /* J/mol, of P2 */
#define MOST 1600           /* cells */
#define TIGHT 1e-13         /* tolerance of the reference; that it is good to 1e-9 is checked */

enum kind { HOLD, RAMP, RELAX };

struct leg {
    enum kind kind;
    double until;   /* yr */
    double from, to; /* K; of RELAX, the temperature it comes to rest at */
    double tau;     /* yr */
};

struct problem {
    int number, cells;
    double size;                /* um */
    double ln_d, cold;          /* D = exp(ln_d - cold/T), um2/yr */
    double low, high;           /* of the start */
    double start[MOST];
    double volume[MOST];        /* divided by the area of the outermost face */
    double area[MOST + 1];      /* of each face, the same, and divided by the distance of what it lies between */
    double d[MOST + 1];         /* of each face of P2 */
    double slope[MOST + 1];     /* of each face of P2: the difference of X across it */
    int legs;
    struct leg leg[40];
    int current;                /* leg in hand */
    double begun;               /* yr, its start */
    int reduced;                /* integrate over G instead of time */
};

/* The ways in which a path is run. */
struct variant {
    const char *name;
    int fresh;   /* a new Jacobian in every step */
    int reduced; /* in G instead of time, without break points; not where the operator changes with T */
};
static const struct variant variants[] = {{"CVODE", 0, 0}, {"CVODE-fresh", 1, 0}, {"CVODE-in-G", 0, 1}};
enum { VARIANTS = sizeof variants / sizeof *variants };

static void add_leg(struct problem *p, enum kind kind, double years, double from, double to, double tau) {
    double begin = p->legs ? p->leg[p->legs - 1].until : 0;
    p->leg[p->legs++] = (struct leg){kind, begin + years, from + ZERO, to + ZERO, tau};
}

/* pulse_train is the path of P1 and P2. */
static void pulse_train(struct problem *p) {
    add_leg(p, HOLD, 100, 690, 690, 1);
    for (int i = 0; i < 10; i++) {
        add_leg(p, RAMP, 5, 690, 780, 1);
        add_leg(p, HOLD, 20, 780, 780, 1);
        add_leg(p, RELAX, i < 9 ? 175 : 75, 780, 690, 15);
    }
}

/* box is the path of P3. */
static void box(struct problem *p) {
    const double week = 7 / 365.25;
    add_leg(p, RAMP, 0.5, 1150, 1100, 1);
    add_leg(p, HOLD, week, 1200, 1200, 1);
    add_leg(p, RAMP, 0.5 - week, 1100 - 100 * week, 1050, 1);
}

static double host(double x) { return 0.25 + 0.10 * (1 + tanh((x - 80) / 3)) - 0.075 * (1 + tanh((x - 160) / 3)); }

static void lay(struct problem *p) {
    int n = p->cells, ball = p->number == 3;
    double h = p->size / n;
    for (int i = 0; i < n; i++) {
        double a = i * h / p->size, b = (i + 1) * h / p->size, x = (i + 0.5) * h;
        p->volume[i] = ball ? p->size * (b * b * b - a * a * a) / 3 : h;
        if (ball) p->start[i] = x < 150 ? 0.1 : 0.2;
        else p->start[i] = x < 80 ? 100 : x < 160 ? 40 : 70;
    }
    for (int i = 0; i <= n; i++) {
        double x = i * h, distance = i == n ? h / 2 : h;
        p->area[i] = (i == 0 ? 0 : ball ? x * x / (p->size * p->size) : 1) / distance;
        p->d[i] = p->number == 2 ? pow(10, -4.1 * host(x)) : 1;
        p->slope[i] = p->number == 2 ? host(i == n ? x : x + h / 2) - host(x - h / 2) : 0;
    }
}

static void set(struct problem *p, int number, int cells) {
    const double d0[] = {7.01e-8, 2.92 * pow(10, -4.08), pow(10, -9.21)}; /* m2/s */
    static const double energy[] = {273000, 276000, 201000};              /* J/mol */
    memset(p, 0, sizeof *p);
    p->number = number;
    p->cells = cells;
    p->size = number == 3 ? 300 : 200;
    p->low = number == 3 ? 0.1 : 40;
    p->high = number == 3 ? 0.2 : 100;
    p->ln_d = log(d0[number - 1] * 1e12 * YEAR);
    p->cold = energy[number - 1] / GAS;
    if (number == 3) box(p);
    else pulse_train(p);
    lay(p);
}

static double temperature(const struct problem *p, double t) {
    const struct leg *l = &p->leg[p->current];
    double part = (t - p->begun) / (l->until - p->begun);
    switch (l->kind) {
    case RAMP: return l->from + (l->to - l->from) * part;
    case RELAX: return l->to + (l->from - l->to) * exp(-(t - p->begun) / l->tau);
    default: return l->from;
    }
}

static double own(double c) { return exp(3 * M_LN10 * (c - 0.1)); }

/* conditions sets what D is multiplied by everywhere, A/(2 R T) and the value at the rim. */
static void conditions(const struct problem *p, double t, double *g, double *pull, double *rim) {
    *g = 1;
    *pull = 0;
    *rim = p->number == 3 ? 0.25 : 70;
    if (p->reduced) return;
    double temp = temperature(p, t);
    *g = exp(p->ln_d - p->cold / temp);
    if (p->number != 2) return;
    *pull = COUPLING / (2 * GAS * temp);
    *rim = 100 * exp(COUPLING / GAS * 0.30 * (1 / temp - 1 / 1023.15));
}

static int rates(double t, N_Vector y, N_Vector dy, void *data) {
    struct problem *p = data;
    int n = p->cells;
    const double *c = N_VGetArrayPointer(y);
    double *f = N_VGetArrayPointer(dy), g, pull, rim, inner = 0, inside = 0;
    conditions(p, t, &g, &pull, &rim);
    if (p->number == 3) inside = own(c[0]);
    for (int i = 0; i < n; i++) {
        double next = i == n - 1 ? rim : c[i + 1], outer = g * p->area[i + 1];
        if (p->number == 3) {
            double outside = own(next);
            outer *= 0.5 * (inside + outside) * (c[i] - next);
            inside = outside;
        } else {
            outer *= p->d[i + 1] * (c[i] - next + (c[i] + next) * pull * p->slope[i + 1]);
        }
        f[i] = (inner - outer) / p->volume[i];
        inner = outer;
    }
    return 0;
}

/* jacobian sets the matrix of all derivatives of rates. */
static int jacobian(double t, N_Vector y, N_Vector fy, SUNMatrix matrix, void *data, N_Vector a, N_Vector b, N_Vector e) {
    struct problem *p = data;
    (void)fy, (void)a, (void)b, (void)e;
    int n = p->cells;
    const double *c = N_VGetArrayPointer(y);
    double g, pull, rim, by_inside = 0, by_outside = 0; /* derivatives of the flux through the inner face */
    conditions(p, t, &g, &pull, &rim);
    for (int i = 0; i < n; i++) {
        double next = i == n - 1 ? rim : c[i + 1], k = g * p->area[i + 1], in, out;
        if (p->number == 3) {
            double here = own(c[i]), there = own(next), mean = 0.5 * (here + there), half = 0.5 * 3 * M_LN10 * (c[i] - next);
            in = k * (mean + half * here);
            out = k * (half * there - mean);
        } else {
            in = k * p->d[i + 1] * (1 + pull * p->slope[i + 1]);
            out = k * p->d[i + 1] * (pull * p->slope[i + 1] - 1);
        }
        SM_ELEMENT_B(matrix, i, i) = (by_outside - in) / p->volume[i];
        if (i > 0) SM_ELEMENT_B(matrix, i, i - 1) = by_inside / p->volume[i];
        if (i < n - 1) SM_ELEMENT_B(matrix, i, i + 1) = -out / p->volume[i];
        by_inside = in;
        by_outside = out;
    }
    return 0;
}

/* integral is that of D over the leg in hand, um2, by Gauss and Legendre with five points in eight parts. */
static double integral(struct problem *p) {
    static const double at[] = {0, 0.5384693101056831, 0.9061798459386640};
    static const double weight[] = {0.5688888888888889, 0.4786286704993665, 0.2369268850561891};
    double sum = 0, half = (p->leg[p->current].until - p->begun) / 16;
    for (int part = 0; part < 8; part++) {
        double middle = p->begun + (2 * part + 1) * half;
        for (int i = -2; i <= 2; i++) {
            double x = i < 0 ? -at[-i] : at[i];
            sum += half * weight[abs(i)] * exp(p->ln_d - p->cold / temperature(p, middle + half * x));
        }
    }
    return sum;
}

static void check(int status, const char *what) {
    if (status < 0) {
        fprintf(stderr, "cvode: %s returned %d\n", what, status);
        exit(1);
    }
}

/* legwise goes from break point to break point, restarting at each. */
static void legwise(void *solver, struct problem *p, N_Vector y) {
    double t = 0;
    for (p->current = 0, p->begun = 0; p->current < p->legs; p->current++) {
        double until = p->leg[p->current].until;
        if (p->current > 0) check(CVodeReInit(solver, p->begun, y), "CVodeReInit");
        check(CVodeSetStopTime(solver, until), "CVodeSetStopTime");
        check(CVode(solver, until, y, &t, CV_NORMAL), "CVode");
        p->begun = until;
    }
}

/* at_once goes over G in one run. */
static void at_once(void *solver, struct problem *p, N_Vector y) {
    double sum = 0, s = 0;
    for (p->current = 0, p->begun = 0; p->current < p->legs; p->current++) {
        sum += integral(p);
        p->begun = p->leg[p->current].until;
    }
    check(CVodeSetStopTime(solver, sum), "CVodeSetStopTime");
    check(CVode(solver, sum, y, &s, CV_NORMAL), "CVode");
}

/* solve takes p's start along its path and writes the profile to c, all that it needs made and freed here. */
static void solve(struct problem *p, const struct variant *v, double tolerance, double *c) {
    SUNContext context;
    check(SUNContext_Create(NULL, &context), "SUNContext_Create");
    N_Vector y = N_VNew_Serial(p->cells, context);
    memcpy(N_VGetArrayPointer(y), p->start, p->cells * sizeof *c);
    void *solver = CVodeCreate(CV_BDF, context);
    check(CVodeInit(solver, rates, 0, y), "CVodeInit");
    check(CVodeSStolerances(solver, tolerance, tolerance * (p->high - p->low)), "CVodeSStolerances");
    check(CVodeSetUserData(solver, p), "CVodeSetUserData");
    check(CVodeSetMaxNumSteps(solver, 10000000), "CVodeSetMaxNumSteps");
    SUNMatrix matrix = SUNBandMatrix(p->cells, 1, 1, context);
    SUNLinearSolver linear = SUNLinSol_Band(y, matrix, context);
    check(CVodeSetLinearSolver(solver, linear, matrix), "CVodeSetLinearSolver");
    check(CVodeSetJacFn(solver, jacobian), "CVodeSetJacFn");
    if (v->fresh) {
        check(CVodeSetLSetupFrequency(solver, 1), "CVodeSetLSetupFrequency");
        check(CVodeSetJacEvalFrequency(solver, 1), "CVodeSetJacEvalFrequency");
    }
    p->reduced = v->reduced;
    if (p->reduced) at_once(solver, p, y);
    else legwise(solver, p, y);
    memcpy(c, N_VGetArrayPointer(y), p->cells * sizeof *c);
    CVodeFree(&solver);
    SUNLinSolFree(linear);
    SUNMatDestroy(matrix);
    N_VDestroy(y);
    SUNContext_Free(&context);
}

/* error is the largest difference of two profiles, as a part of the range of the start. */
static double error(const struct problem *p, const double *a, const double *b) {
    double most = 0;
    for (int i = 0; i < p->cells; i++) most = fmax(most, fabs(a[i] - b[i]));
    return most / (p->high - p->low);
}

/* refer integrates to 1e-9, or ends the program. */
static void refer(struct problem *p, double *c) {
    double looser[MOST];
    solve(p, &variants[0], TIGHT, c);
    solve(p, &variants[0], 10 * TIGHT, looser);
    if (!(error(p, looser, c) <= 1e-9)) {
        fprintf(stderr, "cvode: the reference of P%d is only good to %.2g\n", p->number, error(p, looser, c));
        exit(1);
    }
}

enum { LADDER = 57 };

/* rung is a tolerance of the ladder, eight to a decade. */
static double rung(int k) { return pow(10, -2 - k / 8.0); }

/* choose prints the tolerance with which an error is first reached, and the one from which on it is kept. */
static void choose(const struct problem *p, const char *variant, double wanted, const double *errors) {
    int first = LADDER - 1, safe = 0;
    for (int k = LADDER - 1; k >= 0; k--)
        if (errors[k] <= wanted) first = k;
    for (int k = 0; k < LADDER; k++)
        if (!(errors[k] <= wanted)) safe = k + 1;
    if (safe == LADDER) {
        fprintf(stderr, "cvode: P%d, %s: no tolerance has an error of %g\n", p->number, variant, wanted);
        exit(1);
    }
    printf("P%d %s %g %.3g %.2g first\n", p->number, variant, wanted, rung(first), errors[first]);
    printf("P%d %s %g %.3g %.2g safe\n", p->number, variant, wanted, rung(safe), errors[safe]);
}

static void tune(void) {
    static struct problem p;
    static double truth[MOST], c[MOST], errors[LADDER];
    for (int number = 1; number <= 3; number++) {
        set(&p, number, 200);
        refer(&p, truth);
        for (int v = 0; v < VARIANTS; v++) {
            if (variants[v].reduced && number == 2) continue;
            for (int k = 0; k < LADDER; k++) {
                solve(&p, &variants[v], rung(k), c);
                errors[k] = error(&p, c, truth);
            }
            choose(&p, variants[v].name, 1e-3, errors);
            choose(&p, variants[v].name, 1e-4, errors);
        }
    }
}

/* seconds is the processor time of this process. */
static double seconds(void) {
    struct timespec t;
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &t);
    return t.tv_sec + 1e-9 * t.tv_nsec;
}

static void clock_path(int number, const char *name, double tolerance) {
    static struct problem p;
    static double c[MOST];
    for (int v = 0; v < VARIANTS; v++) {
        if (strcmp(name, variants[v].name)) continue;
        int paths = 0;
        double begin, spent;
        set(&p, number, 200);
        solve(&p, &variants[v], tolerance, c);
        begin = seconds();
        do {
            set(&p, number, 200);
            solve(&p, &variants[v], tolerance, c);
            paths++;
            spent = seconds() - begin;
        } while (spent < 0.3);
        printf("%.2f\n", 1e6 * spent / paths);
        return;
    }
    fprintf(stderr, "cvode: no variant %s\n", name);
    exit(2);
}

int main(int argc, char **argv) {
    static struct problem p;
    static double c[MOST];
    if (argc == 2 && !strcmp(argv[1], "tune")) {
        tune();
    } else if (argc == 5 && !strcmp(argv[1], "time")) {
        clock_path(argv[2][1] - '0', argv[3], atof(argv[4]));
    } else if (argc == 4 && !strcmp(argv[1], "profile") && atoi(argv[3]) > 1 && atoi(argv[3]) <= MOST) {
        set(&p, argv[2][1] - '0', atoi(argv[3]));
        refer(&p, c);
        for (int i = 0; i < p.cells; i++) printf("%.17g\n", c[i]);
    } else {
        fprintf(stderr, "usage: cvode tune | time PROBLEM VARIANT RTOL | profile PROBLEM CELLS\n");
        return 2;
    }
    return 0;
}
