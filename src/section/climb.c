/* See climb.h. The simplex method of J. A. Nelder and R. Mead, Comput. J. 7, 308 (1965): of count +
 * 1 points the lowest is reflected at the middle of the others, the simplex grows where that leads
 * up, and shrinks where nothing does. A second, smaller simplex about the summit found first guards
 * against one that has collapsed on the way. */
#include "section/climb.h"

#include <assert.h>
#include <math.h>
#include <string.h>

enum { CORNERS = PK_CLIMB_VARIABLES + 1, MOST_MOVES = 200, ROUNDS = 2 };

/* Heights near a summit are flat: places closer than this part of a stride can't be told apart. */
static const double NEAR = 1e-5;
static const double SECOND_ROUND = 0.05; /* its strides */

typedef struct simplex {
  int count;
  double at[CORNERS][PK_CLIMB_VARIABLES];
  double height[CORNERS];
  pk_climb_height function;
  void *user;
} simplex;

/* Corner 0 highest, the last one lowest. */
static void sort(simplex *s) {
  for (int i = 1; i <= s->count; i++) {
    for (int j = i; j > 0 && s->height[j] > s->height[j - 1]; j--) {
      double height = s->height[j], at[PK_CLIMB_VARIABLES];
      memcpy(at, s->at[j], sizeof at);
      s->height[j] = s->height[j - 1];
      memcpy(s->at[j], s->at[j - 1], sizeof at);
      s->height[j - 1] = height;
      memcpy(s->at[j - 1], at, sizeof at);
    }
  }
}

/* The point on the line from the lowest corner through the middle of the others: 1 is the middle, 2
 * the mirror image. */
static double try_point(const simplex *s, double factor, double *at) {
  for (int k = 0; k < s->count; k++) {
    double middle = 0;
    for (int i = 0; i < s->count; i++) {
      middle += s->at[i][k] / s->count;
    }
    at[k] = s->at[s->count][k] + factor * (middle - s->at[s->count][k]);
  }
  return s->function(at, s->user);
}

static void replace_lowest(simplex *s, const double *at, double height) {
  memcpy(s->at[s->count], at, sizeof s->at[0]);
  s->height[s->count] = height;
}

static void shrink(simplex *s) {
  for (int i = 1; i <= s->count; i++) {
    for (int k = 0; k < s->count; k++) {
      s->at[i][k] = 0.5 * (s->at[0][k] + s->at[i][k]);
    }
    s->height[i] = s->function(s->at[i], s->user);
  }
}

static void move(simplex *s) {
  double at[PK_CLIMB_VARIABLES] = {0}, other[PK_CLIMB_VARIABLES] = {0};
  double height = try_point(s, 2, at);
  if (height > s->height[0]) {
    double further = try_point(s, 3, other);
    replace_lowest(s, further > height ? other : at, fmax(further, height));
  } else if (height > s->height[s->count - 1]) {
    replace_lowest(s, at, height);
  } else {
    double inner = try_point(s, height > s->height[s->count] ? 1.5 : 0.5, other);
    if (inner > s->height[s->count]) {
      replace_lowest(s, other, inner);
    } else {
      shrink(s);
    }
  }
}

static int is_small(const simplex *s, const double *step) {
  for (int i = 1; i <= s->count; i++) {
    for (int k = 0; k < s->count; k++) {
      if (fabs(s->at[i][k] - s->at[0][k]) > NEAR * step[k]) {
        return 0;
      }
    }
  }
  return 1;
}

double pk_climb(int count, double *at, const double *step, pk_climb_height height, void *user) {
  assert(count >= 1 && count <= PK_CLIMB_VARIABLES);
  simplex s = {.count = count, .function = height, .user = user};
  for (int k = 0; k < count; k++) {
    s.at[0][k] = at[k];
  }
  for (int round = 0; round < ROUNDS; round++) {
    for (int i = 0; i <= count; i++) {
      memcpy(s.at[i], s.at[0], sizeof s.at[0]);
      if (i > 0) {
        s.at[i][i - 1] += round == 0 ? step[i - 1] : SECOND_ROUND * step[i - 1];
      }
      s.height[i] = height(s.at[i], user);
    }
    sort(&s);
    for (int moves = 0; moves < MOST_MOVES && !is_small(&s, step); moves++) {
      move(&s);
      sort(&s);
    }
  }
  for (int k = 0; k < count; k++) {
    at[k] = s.at[0][k];
  }
  return s.height[0];
}
