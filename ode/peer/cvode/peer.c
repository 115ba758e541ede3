/* Runs CVODE on the problems of the comparison: peer PROBLEM RTOL PASSES.
 *
 * One workspace serves all members, difference Jacobian, BDF. Raw doubles of
 * all outputs go to standard output; "CPU nanoseconds steps evaluations failed
 * roots" of the fastest pass, per member, to standard error. */
#include <cvode/cvode.h>
#include <math.h>
#include <nvector/nvector_serial.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sundials/sundials_types.h>
#include <sunlinsol/sunlinsol_band.h>
#include <sunlinsol/sunlinsol_dense.h>
#include <sunmatrix/sunmatrix_band.h>
#include <sunmatrix/sunmatrix_dense.h>
#include <time.h>

#define NMAX 64
#define Y(v) NV_DATA_S(v)

typedef struct {
  double heat, B, F, ti, wi, warm, cold, w0, beta, te, c0, v0, kr, kd;
} thermo;

static thermo th;

static void thermo_member(int i, double *y0) {
  static const double p[8] = {2, 3, 5, 7, 11, 13, 17, 19};
  double u[8];
  for (int k = 0; k < 8; k++) {
    double v = (i + 1) * sqrt(p[k]);
    u[k] = v - floor(v);
  }
  th = (thermo){1.5e8, 1.8 + 0.6 * u[0], 5.35 * (0.8 + 0.6 * u[1]), 262, 8 + 6 * u[2], 0.29, 0.60,
                8000 * (0.4 + 0.5 * u[3]), 0.2 + 0.3 * u[4], 10 + 8 * u[5], 3,
                0.4 * (0.5 + 1.2 * u[6]), 0.5, 1};
  y0[0] = 280 + 20 * u[7];
  y0[1] = 60 * (1 + 4 * u[0]);
  y0[2] = 4000;
  y0[3] = 20000;
}

static int f_thermo(double t, N_Vector yv, N_Vector dv, void *ud) {
  double *y = Y(yv), *d = Y(dv);
  if (!(y[1] > 0)) return 1;
  double l = log(y[1] / th.c0), x = y[0] - 288;
  double alb = th.warm + (th.cold - th.warm) / (1 + exp(2 * (y[0] - th.ti) / th.wi));
  double s = 240 / (1 + 0.2 * (1 - t / 4.57));
  double w = th.w0 * exp(th.beta * l + x / th.te);
  double v = th.v0 * exp(-0.25 * t) * y[3];
  double r = th.kr * y[2], q = th.kd * y[2];
  d[0] = (s * (1 - alb) / 0.7 - 235 - th.B * x + th.F * l) * th.heat;
  d[1] = v + r - w;
  d[2] = w - r - q;
  d[3] = q - v;
  return 0;
}

static int g_thermo(double t, N_Vector yv, double *g, void *ud) {
  g[0] = Y(yv)[0] - 255;
  g[1] = Y(yv)[1] - 1;
  return 0;
}

static int f_rob(double t, N_Vector yv, N_Vector dv, void *ud) {
  double *y = Y(yv), *d = Y(dv);
  double a = 1e4 * y[1] * y[2] - 0.04 * y[0], b = 3e7 * y[1] * y[1];
  d[0] = a;
  d[1] = -a - b;
  d[2] = b;
  return 0;
}

static int f_hires(double t, N_Vector yv, N_Vector dv, void *ud) {
  double *y = Y(yv), *d = Y(dv);
  double r = 280 * y[5] * y[7];
  d[0] = -1.71 * y[0] + 0.43 * y[1] + 8.32 * y[2] + 0.0007;
  d[1] = 1.71 * y[0] - 8.75 * y[1];
  d[2] = -10.03 * y[2] + 0.43 * y[3] + 0.035 * y[4];
  d[3] = 8.32 * y[1] + 1.71 * y[2] - 1.12 * y[3];
  d[4] = -1.745 * y[4] + 0.43 * y[5] + 0.43 * y[6];
  d[5] = -r + 0.69 * y[3] + 1.71 * y[4] - 0.43 * y[5] + 0.69 * y[6];
  d[6] = r - 1.81 * y[6];
  d[7] = -r + 1.81 * y[6];
  return 0;
}

static int f_oreg(double t, N_Vector yv, N_Vector dv, void *ud) {
  double *y = Y(yv), *d = Y(dv);
  const double s = 77.27, q = 8.375e-6, w = 0.161;
  d[0] = s * (y[1] + y[0] * (1 - q * y[0] - y[1]));
  d[1] = (y[2] - (1 + y[0]) * y[1]) / s;
  d[2] = w * (y[0] - y[2]);
  return 0;
}

static int f_vdp(double t, N_Vector yv, N_Vector dv, void *ud) {
  double *y = Y(yv), *d = Y(dv);
  d[0] = y[1];
  d[1] = ((1 - y[0] * y[0]) * y[1] - y[0]) * 1e6;
  return 0;
}

/* One-dimensional Brusselator, N points, u and v interleaved. */
#define BN 20
static int f_bruss(double t, N_Vector yv, N_Vector dv, void *ud) {
  double *y = Y(yv), *d = Y(dv);
  const double c = 0.02 * (BN + 1) * (BN + 1);
  for (int i = 0; i < BN; i++) {
    double u = y[2 * i], v = y[2 * i + 1];
    double ul = i > 0 ? y[2 * i - 2] : 1, vl = i > 0 ? y[2 * i - 1] : 3;
    double ur = i < BN - 1 ? y[2 * i + 2] : 1, vr = i < BN - 1 ? y[2 * i + 3] : 3;
    double uuv = u * u * v;
    d[2 * i] = 1 + uuv - 4 * u + c * (ul - 2 * u + ur);
    d[2 * i + 1] = 3 * u - uuv + c * (vl - 2 * v + vr);
  }
  return 0;
}

/* A chain of 20 species: decay along it and a quadratic back reaction. */
#define KN 20
static int f_chain(double t, N_Vector yv, N_Vector dv, void *ud) {
  double *y = Y(yv), *d = Y(dv);
  double k = 1e-2;
  for (int i = 0; i < KN; i++) d[i] = 0;
  for (int i = 0; i < KN; i++) {
    int j = (i + 1) % KN, m = (i + 7) % KN;
    double r = k * y[i] + 0.1 * k * y[i] * y[m];
    d[i] -= r;
    d[j] += r;
    k *= 2.2;
  }
  return 0;
}

typedef struct {
  const char *name;
  int n, members, outputs, roots, band;
  double t1;
  double y0[NMAX], scale[NMAX];
  CVRhsFn f;
  CVRootFn g;
} problem;

static problem problems[] = {
    {"thermostat", 4, 256, 45, 2, 0, 4.5, {0}, {1, 1e-2, 1, 1}, f_thermo, g_thermo},
    {"robertson", 3, 1, 1, 0, 0, 40, {1, 0, 0}, {1e-3, 1e-8, 1e-3}, f_rob},
    {"hires", 8, 1, 1, 0, 0, 321.8122, {1, 0, 0, 0, 0, 0, 0, 0.0057},
     {1e-4, 1e-4, 1e-4, 1e-4, 1e-4, 1e-4, 1e-4, 1e-4}, f_hires},
    {"oregonator", 3, 1, 1, 0, 0, 360, {1, 2, 3}, {1e-2, 1e-2, 1e-2}, f_oreg},
    {"vanderpol", 2, 1, 1, 0, 0, 2, {2, 0}, {1e-2, 1e-2}, f_vdp},
    {"brusselator", 40, 1, 1, 0, 2, 10, {0}, {0}, f_bruss},
    {"chain", 20, 1, 1, 0, 0, 100, {0}, {0}, f_chain},
};

static double now(void) {
  struct timespec ts;
  clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &ts);
  return 1e9 * ts.tv_sec + ts.tv_nsec;
}

static void quiet(int code, const char *m, const char *fn, char *msg, void *d) {}

int main(int argc, char **argv) {
  if (argc != 4) {
    fprintf(stderr, "usage: peer PROBLEM RTOL PASSES\n");
    return 2;
  }
  problem *p = NULL;
  for (size_t i = 0; i < sizeof problems / sizeof *problems; i++)
    if (!strcmp(problems[i].name, argv[1])) p = &problems[i];
  if (!p) {
    fprintf(stderr, "peer: no problem \"%s\"\n", argv[1]);
    return 2;
  }
  double rtol = atof(argv[2]);
  int passes = atoi(argv[3]), n = p->n;
  if (p->f == f_bruss)
    for (int i = 0; i < BN; i++) {
      p->y0[2 * i] = 1 + sin(2 * M_PI * (i + 1) / (BN + 1));
      p->y0[2 * i + 1] = 3;
      p->scale[2 * i] = p->scale[2 * i + 1] = 1e-2;
    }
  if (p->f == f_chain)
    for (int i = 0; i < KN; i++) {
      p->y0[i] = i % 4 == 0;
      p->scale[i] = 1e-6;
    }

  SUNContext ctx;
  SUNContext_Create(NULL, &ctx);
  N_Vector y = N_VNew_Serial(n, ctx), at = N_VNew_Serial(n, ctx);
  for (int i = 0; i < n; i++) Y(at)[i] = rtol * p->scale[i], Y(y)[i] = p->y0[i];
  if (p->f == f_thermo) thermo_member(0, Y(y));
  void *cv = CVodeCreate(CV_BDF, ctx);
  CVodeInit(cv, p->f, 0, y);
  CVodeSVtolerances(cv, rtol, at);
  CVodeSetErrHandlerFn(cv, quiet, NULL);
  CVodeSetMaxNumSteps(cv, 1000000);
  SUNMatrix A;
  SUNLinearSolver ls;
  if (p->band) {
    A = SUNBandMatrix(n, p->band, p->band, ctx);
    ls = SUNLinSol_Band(y, A, ctx);
  } else {
    A = SUNDenseMatrix(n, n, ctx);
    ls = SUNLinSol_Dense(y, A, ctx);
  }
  CVodeSetLinearSolver(cv, ls, A);
  if (p->roots) CVodeRootInit(cv, p->roots, p->g);

  double *out = malloc(sizeof(double) * n * p->members * p->outputs);
  double best = 1e300;
  long steps, evals, failed, roots;
  for (int pass = 0; pass < passes; pass++) {
    steps = evals = failed = roots = 0;
    double t0 = now();
    for (int m = 0; m < p->members; m++) {
      if (p->f == f_thermo)
        thermo_member(m, Y(y));
      else
        memcpy(Y(y), p->y0, n * sizeof(double));
      CVodeReInit(cv, 0, y);
      double t = 0;
      int bad = 0;
      for (int k = 0; k < p->outputs; k++) {
        double tout = p->t1 * (k + 1) / p->outputs;
        while (!bad) {
          int r = CVode(cv, tout, y, &t, CV_NORMAL);
          if (r == CV_ROOT_RETURN) {
            roots++;
            continue;
          }
          bad = r < 0;
          break;
        }
        for (int i = 0; i < n; i++) out[(m * p->outputs + k) * n + i] = bad ? NAN : Y(y)[i];
      }
      failed += bad;
      long a, b, c;
      CVodeGetNumSteps(cv, &a);
      CVodeGetNumRhsEvals(cv, &b);
      CVodeGetNumLinRhsEvals(cv, &c);
      steps += a;
      evals += b + c;
    }
    double dt = now() - t0;
    if (dt < best) best = dt;
  }
  fwrite(out, sizeof(double), (size_t)n * p->members * p->outputs, stdout);
  fprintf(stderr, "%.1f %.1f %.1f %ld %ld\n", best / p->members, (double)steps / p->members,
          (double)evals / p->members, failed, roots);
  return 0;
}
