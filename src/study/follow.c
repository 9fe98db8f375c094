/* See follow.h. */
#include "study/follow.h"

#include <math.h>

#include "base/memory.h"

void pk_follow_forget(picket_context *context, pk_followed *f) {
  pk_free(context, f->field);
  pk_free(context, f->u);
  pk_free(context, f->v);
  f->field = NULL;
  f->u = f->v = NULL;
}

picket_status pk_follow_remember(picket_context *context, const pk_operator *op,
                                 const pk_wave *wave, pk_followed *f) {
  pk_follow_forget(context, f);
  f->nu = pk_operator_lines(op, PK_U);
  f->nv = pk_operator_lines(op, PK_V);
  f->xi = wave->xi;
  f->u = PK_NEW(context, f->nu, double);
  f->v = PK_NEW(context, f->nv, double);
  f->field = pk_copy(context, wave->right, (size_t)f->nu * (size_t)f->nv, sizeof *f->field);
  if (!f->u || !f->v || !f->field) {
    return PICKET_ERROR_MEMORY;
  }
  double length;
  for (int i = 0; i < f->nu; i++) {
    pk_operator_line(op, PK_U, i, &f->u[i], &length);
  }
  for (int i = 0; i < f->nv; i++) {
    pk_operator_line(op, PK_V, i, &f->v[i], &length);
  }
  return PICKET_OK;
}

/* The place of a coordinate among lines: the line below, and the part of the way to the next;
 * clamped. */
static int place_of(int count, const double *lines, double s, double *part) {
  int i = 0;
  while (i + 2 < count && lines[i + 1] <= s) {
    i++;
  }
  *part = count > 1 ? fmin(1, fmax(0, (s - lines[i]) / (lines[i + 1] - lines[i]))) : 0;
  return i;
}

/* The remembered field on the lines of another grid, by linear interpolation: a start for a solve.
 */
double complex *pk_follow_prolonged(picket_context *context, const pk_operator *op,
                                    const pk_followed *f) {
  int nu = pk_operator_lines(op, PK_U), nv = pk_operator_lines(op, PK_V);
  double complex *field = PK_NEW(context, (int64_t)nu * nv, double complex);
  for (int iu = 0; field && iu < nu; iu++) {
    double z, length, pu;
    pk_operator_line(op, PK_U, iu, &z, &length);
    int a = place_of(f->nu, f->u, z, &pu);
    for (int iv = 0; iv < nv; iv++) {
      double x, pv;
      pk_operator_line(op, PK_V, iv, &x, &length);
      int b = place_of(f->nv, f->v, x, &pv);
      int next = f->nv > 1 ? 1 : 0;
      const double complex *low = f->field + (int64_t)a * f->nv + b, *high = low + f->nv;
      field[(int64_t)iu * nv + iv] = (1 - pu) * ((1 - pv) * low[0] + pv * low[next]) +
                                     pu * ((1 - pv) * high[0] + pv * high[next]);
    }
  }
  return field;
}
