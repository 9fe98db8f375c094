/* A problem as it was understood: what a file (or a program) says, checked, in the units of the
 * library (µm, °C), ready for the studies. Made by io from a document; read-only afterwards. */
#ifndef PK_STUDY_PROBLEM_H
#define PK_STUDY_PROBLEM_H

#include <stdbool.h>

#include "base/context.h"
#include "geometry/cell.h"
#include "material/material.h"
#include "operator/operator.h"
#include "study/measured.h"
#include "study/spread.h"
#include "study/taper_law.h"

typedef struct pk_light {
  bool given;
  pk_place place;
  int count; /* wavelengths, rising */
  double *wavelength_um;
  bool wanted[2]; /* [PK_EY], [PK_HY] */
} pk_light;

typedef struct pk_path_point {
  double at[2]; /* k_z in π/pitch, k_x in π/lateral span */
  char *label;  /* or null */
} pk_path_point;

typedef struct pk_path {
  bool given;
  int count;
  pk_path_point *point;
} pk_path;

typedef struct pk_slab_block {
  bool given;
  pk_place place;
  pk_slab_recipe recipe; /* arrays owned by the block; `order` unused */
  bool wanted[2];        /* [PK_SLAB_TE], [PK_SLAB_TM] */
} pk_slab_block;

/* A section: its painted plane (u = x, v = y), whose media are numbers of the materials. */
typedef struct pk_section_block {
  bool given;
  pk_place place;
  pk_geometry *geometry;
  bool *used;                   /* [materials] named by the block */
  double span_um[2];            /* width and height of the window around (0, 0); 0: not given */
  double low_um[2], high_um[2]; /* extent of the shapes with ends; low above high: none */
  double bend_radius_um;        /* about the line x = -radius; 0: straight */
  int others;                   /* of a channel's outline: further planes that it consists of */
  pk_geometry **other;          /* [others] borrowed */
} pk_section_block;

/* A channel: planes across the guide, one after the other along z, repeated with the pitch. Slice i
 * reaches from from_um[i] to from_um[i + 1]. */
typedef struct pk_channel_block {
  bool given;
  pk_place place;
  double pitch_um;
  int cladding;    /* material where nothing is painted */
  bool use_planes; /* mirror planes may halve the problem */
  int slices;
  double *from_um;          /* [slices + 1] rising, the first slice begins at or after -pitch/2 */
  pk_geometry **slice;      /* [slices] */
  pk_section_block outline; /* all slices at once; its planes are the slices' */
} pk_channel_block;

/* One number of the file that is varied until a quantity meets its target. */
typedef struct pk_aim_part {
  char *vary;        /* its dotted path */
  double between[2]; /* rising, in the unit of the file */
  pk_measured quantity;
  double target;  /* in the unit of the quantity */
  double at_um;   /* for quantities at one wavelength, else NaN */
  pk_place place; /* of the quantity */
} pk_aim_part;

enum { PK_AIM_PARTS = 2 };
typedef struct pk_aim_block {
  bool given;
  int count; /* of parts: as many targets as numbers */
  pk_aim_part part[PK_AIM_PARTS];
  bool family_given;
  bool wanted[2]; /* families of a section or a channel: te-like, tm-like */
} pk_aim_block;

/* What a process spreads, and what a quantity must be in spite of it. */
typedef struct pk_tolerance_block {
  bool given;
  int count;         /* spreads */
  pk_spread *spread; /* [count] */
  pk_measured quantity;
  double at_um;       /* for a quantity at one wavelength, else NaN */
  double least, most; /* required of it; infinite where nothing is */
  pk_place place;     /* of the quantity */
  int samples, seed;
  int direct;        /* most samples that are solved directly */
  bool family_given; /* else a channel's families are those of light */
  bool wanted[2];    /* families of a section or a channel: te-like, tm-like */
} pk_tolerance_block;

/* What a mask allows. */
typedef struct pk_rules_block {
  bool given;
  double smallest_um; /* 0: not given */
  double grid_um;     /* 0: not given */
} pk_rules_block;

typedef struct pk_problem {
  picket_context *context; /* held */
  char *name;              /* "" if not given */
  double temperature_c;
  pk_light light;
  pk_materials *materials;
  bool has_cell;
  pk_place cell_place;
  pk_cell cell;
  double smallest_um; /* of the shapes in the file, for advice */
  pk_path path;
  pk_slab_block slab;
  pk_section_block section;
  pk_channel_block channel;
  pk_aim_block aim;
  pk_tolerance_block tolerance;
  pk_taper_block taper;
  pk_rules_block rules;
} pk_problem;

/* Accepts null and half-built problems. */
void pk_problem_free(pk_problem *problem);

#endif
