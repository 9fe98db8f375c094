/* See spread.h. */
#include "study/spread.h"

#include <math.h>
#include <string.h>

static const double CORNER_SIGMAS = 3;
static const double TWO_PI = 6.283185307179586;

int pk_spread_deviates(int count, const pk_spread *spread, int deviate_of[PK_SPREADS]) {
  int deviates = 0;
  for (int i = 0; i < count; i++) {
    int first = -1; /* spread of the same group */
    for (int k = 0; k < i && first < 0 && spread[i].group; k++) {
      first = spread[k].group && strcmp(spread[k].group, spread[i].group) == 0 ? k : -1;
    }
    deviate_of[i] = first >= 0 ? deviate_of[first] : deviates++;
  }
  return deviates;
}

void pk_spreading_make(int count, const pk_spread *spread, const double *start, pk_spreading *out) {
  *out = (pk_spreading){.count = count, .spread = spread, .start = start};
  out->deviates = pk_spread_deviates(count, spread, out->deviate_of);
  for (int i = count - 1; i >= 0; i--) { /* the first of a group comes last */
    out->normal[out->deviate_of[i]] = spread[i].normal;
    out->name[out->deviate_of[i]] = spread[i].group ? spread[i].group : spread[i].vary;
  }
}

void pk_spreading_values(const pk_spreading *spreading, const double *deviate, double *values) {
  for (int i = 0; i < spreading->count; i++) {
    const pk_spread *s = &spreading->spread[i];
    double t = deviate[spreading->deviate_of[i]];
    if (s->normal) {
      values[i] = spreading->start[i] + s->sigma * t;
    } else if (t <= -1 || t >= 1) {
      values[i] = t < 0 ? s->from : s->to;
    } else {
      values[i] = s->from + 0.5 * (1 + t) * (s->to - s->from);
    }
  }
}

double pk_spreading_corner(const pk_spreading *spreading, int deviate) {
  return spreading->normal[deviate] ? CORNER_SIGMAS : 1;
}

double pk_spreading_node(const pk_spreading *spreading, int deviate) {
  return spreading->normal[deviate] ? sqrt(3.0) : sqrt(0.6);
}

uint64_t pk_split_mix(uint64_t counter) {
  uint64_t z = (counter + 1) * UINT64_C(0x9e3779b97f4a7c15);
  z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
  z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
  return z ^ (z >> 31);
}

/* Uniform in (0, 1): the middle of one of 2^53 equal parts, so that its logarithm is finite. */
static double uniform(uint64_t bits) {
  return ((double)(bits >> 11) + 0.5) * 0x1p-53;
}

void pk_spreading_draw(const pk_spreading *spreading, int seed, int stream, int sample,
                       double *deviate) {
  /* A key of its own for each seed and stream, then two counters for each deviate. */
  uint64_t key = pk_split_mix(pk_split_mix((uint64_t)seed) ^ (uint64_t)stream);
  for (int j = 0; j < spreading->deviates; j++) {
    uint64_t counter = key + 2 * ((uint64_t)sample * PK_DEVIATES + (uint64_t)j);
    double first = uniform(pk_split_mix(counter));
    if (spreading->normal[j]) {
      double second = uniform(pk_split_mix(counter + 1));
      deviate[j] = sqrt(-2 * log(first)) * cos(TWO_PI * second);
    } else {
      deviate[j] = 2 * first - 1;
    }
  }
}
