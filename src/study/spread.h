/* What a process spreads: numbers of the file that vary by themselves or, in a group, together.
 *
 * A deviate is what is drawn once for a sample: standard normal, or uniform in -1 to 1. All numbers
 * of a group share one, so a common edge bias moves a length and a width together while the pitch
 * stays what it is. */
#ifndef PK_STUDY_SPREAD_H
#define PK_STUDY_SPREAD_H

#include <stdbool.h>
#include <stdint.h>

#include "base/context.h"

enum {
  PK_SPREADS = 32,  /* numbers */
  PK_DEVIATES = 16, /* independent ones: the surrogate of so many takes some 150 solves */
  PK_DEVIATE_NAME = 200
};

/* One number that varies, in the unit of the file. */
typedef struct pk_spread {
  char *vary;      /* its dotted path */
  char *group;     /* or null */
  bool normal;     /* else uniform */
  double sigma;    /* of a normal one, around the value in the file; else NaN */
  double from, to; /* of a uniform one, else NaN */
  pk_place place;
} pk_spread;

/* The spreads with the deviates they follow. */
typedef struct pk_spreading {
  int count;
  const pk_spread *spread;    /* [count] borrowed */
  const double *start;        /* [count] values in the file; borrowed */
  int deviates;               /* at most PK_DEVIATES */
  int deviate_of[PK_SPREADS]; /* [count] */
  bool normal[PK_DEVIATES];
  const char *name[PK_DEVIATES]; /* the group, or the path of the only number */
} pk_spreading;

/* How many independent deviates some spreads have, and which one each follows. */
int pk_spread_deviates(int count, const pk_spread *spread, int deviate_of[PK_SPREADS]);

void pk_spreading_make(int count, const pk_spread *spread, const double *start, pk_spreading *out);

/* The numbers of the file, [count], for deviates [deviates]. Where a uniform one is at an end, so
 * are its numbers to the last digit. */
void pk_spreading_values(const pk_spreading *spreading, const double *deviate, double *values);

/* The deviate of a corner: three standard deviations, or the end of the range. */
double pk_spreading_corner(const pk_spreading *spreading, int deviate);

/* Where a quadratic through three values is best in the mean over the distribution: the outer nodes
 * of the Gaussian quadrature of its weight, sqrt(3) (Hermite) or sqrt(3/5) (Legendre). */
double pk_spreading_node(const pk_spreading *spreading, int deviate);

/* The deviates of sample number `sample` of a stream, [deviates]. Random access: they depend on
 * seed, stream, sample and the number of the deviate alone, so on no order and no worker.
 *
 * SplitMix64 (Steele, Lea & Flood, OOPSLA 2014) as a function of its counter gives 64 bits; the
 * upper 53 are a uniform number. Two of them are a normal one by the transformation of Box & Muller
 * (Ann. Math. Stat. 29, 610, 1958). */
void pk_spreading_draw(const pk_spreading *spreading, int seed, int stream, int sample,
                       double *deviate);

/* The 64 bits of a counter: SplitMix64's finalizer of (counter + 1) times its increment. */
uint64_t pk_split_mix(uint64_t counter);

#endif
