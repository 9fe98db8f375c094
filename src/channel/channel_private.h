/* Inside of a channel: the curls of the staggered grid, the blocks of the mass, the matrix. */
#ifndef PK_CHANNEL_CHANNEL_PRIVATE_H
#define PK_CHANNEL_CHANNEL_PRIVATE_H

#include "channel/modes.h"
#include "section/sites.h"

/* One component of Ce at its place: Σ (plain + turn β) e over its terms. */
enum { PK_CURL_TERMS = 4 };
typedef struct pk_curl {
  int count;
  int site[PK_CURL_TERMS];
  double turn[PK_CURL_TERMS]; /* -1, 0 or 1 */
  double complex plain[PK_CURL_TERMS];
  double complex weight; /* W: the stretched area of the place */
} pk_curl;

/* Sites of one kind that hold the same in every slice share a block. */
typedef struct pk_block {
  int site;               /* one of them, counted as in pk_section_marks */
  bool inverse;           /* inverse rule */
  bool varied;            /* not the same in all slices; else scalar */
  double complex scalar;  /* of a uniform one */
  double complex *matrix; /* [count][count] of a varied one */
} pk_block;

/* A node whose ε_xy couples e_x and e_y around it. */
typedef struct pk_node {
  int site; /* as counted in pk_section_marks */
  int block;
  int x_count, y_count;
  int x_site[2], y_site[2];                    /* of e_x, e_y beside the node */
  double complex x_length[2], y_length[2];     /* stretched half lengths times ½ */
  double plain_x_length[2], plain_y_length[2]; /* the same without stretch */
} pk_node;

/* The matrix site by site: what a column of sites holds. */
typedef struct pk_site_graph {
  int *start;    /* [sites + 1] */
  int *site;     /* [start[sites]] rising in each column */
  bool *full;    /* couples all harmonics, not only like ones */
  int *offset;   /* of the part of a site in each column of unknowns */
  int *height;   /* [sites] entries in each column of unknowns of a site */
  int64_t *base; /* [sites] of the first column of unknowns of a site */
} pk_site_graph;

struct pk_channel {
  picket_context *context;
  double pitch, origin;
  bool mirrored, real_axes;
  bool lossless, is_real; /* of the last load: T Hermitian for real k; T real */
  int low, count;         /* harmonics m = low .. low + count - 1 */
  int media;
  int classes;                 /* slices that differ */
  pk_section **section;        /* [classes] */
  pk_sites *sites;             /* [classes] of the last load */
  double complex *coefficient; /* [classes][2 count - 1] of n = -(count-1) .. count-1 */
  int slices;                  /* neighbours of one class merged */
  double *from;                /* [slices] where they begin, within a pitch of each other */
  int *class_of;               /* [slices] */
  pk_axis x, y;
  int nx, ny, mx, my;
  double complex *dual_x, *dual_y;  /* [nx], [ny] stretched lengths between half lines */
  double *width_x, *width_y;        /* [nx], [ny] the same without stretch */
  int site_count, first_y, first_z; /* of e_x: 0 */
  int64_t n;
  double complex *volume; /* [sites] stretched area of the site */
  double *area;           /* [sites] the same without stretch */
  int *block_of;          /* [sites] */
  int curl_count;
  pk_curl *curl; /* [curl_count]: h_x places, then h_y, then h_z */
  int block_count;
  pk_block *block; /* [block_count] */
  int node_count;
  pk_node *node;                /* [node_count] */
  double complex *permittivity; /* [3][media] of the last load */
  pk_site_graph graph;
  pk_pattern pattern;
  pk_factor *factor[2];   /* by pk_scalar; made at the first use */
  pk_scalar factored;     /* which was used last */
  double complex *values; /* [nnz] of the complex factor */
  double *real_values;    /* [nnz] of the real one */
  double *part;           /* [2n] of a real solve */
};

/* β of harmonic number h. */
double complex pk_channel_beta(const pk_channel *channel, double complex k, int h);

/* slices.c: classes of slices, their Fourier coefficients, the mirror plane. */
picket_status pk_channel_take_slices(pk_channel *channel, const pk_channel_plan *plan);

/* places.c: sites, curls and nodes; blocks.c: groups of sites. */
picket_status pk_channel_take_places(pk_channel *channel);
picket_status pk_channel_take_blocks(pk_channel *channel);

/* The marks of all classes: [classes][pk_section_site_count]. */
picket_status pk_channel_take_marks(const pk_channel *channel, uint64_t **out);

/* blocks.c: blocks [count × count] of given values of all classes, into blocks of the channel
 * or copies of them. */
picket_status pk_blocks_fill(const pk_channel *channel, const pk_sites *sites, pk_block *block);
picket_status pk_blocks_create(const pk_channel *channel, pk_block **out);
void pk_blocks_free(const pk_channel *channel, pk_block *block);

/* [[f]] for the values f of the classes. */
void pk_channel_toeplitz(const pk_channel *channel, const double complex *f,
                         double complex *matrix);
/* The values of the classes at a site (counted as in pk_section_marks). */
void pk_channel_site_values(const pk_channel *channel, const pk_sites *sites, int site,
                            double complex *f);

/* pattern.c */
picket_status pk_channel_take_pattern(pk_channel *channel);
void pk_site_graph_free(picket_context *context, pk_site_graph *graph);

/* times.c: y += factor Cᵀ(a) W C(b) x, where C(β) = C0 + βC1; `a` and `b` say which part. */
typedef enum pk_curl_part { PK_CURL_WHOLE, PK_CURL_TURN } pk_curl_part;
void pk_channel_curl_times(const pk_channel *channel, double complex k, pk_curl_part left,
                           pk_curl_part right, double complex factor, const double complex *x,
                           double complex *y);
/* y += factor M x, Mᵀ x. */
void pk_channel_mass_times(const pk_channel *channel, const pk_block *block, bool transposed,
                           double complex factor, const double complex *x, double complex *y);
/* Ce, harmonics innermost: [curl_count][count]. */
void pk_channel_curl(const pk_channel *channel, double complex k, pk_curl_part part,
                     const double complex *e, double complex *h);
/* lᵀ Cᵀ(a) W C(b) r and lᵀ M r. */
double complex pk_channel_curl_form(const pk_channel *channel, double complex k, pk_curl_part left,
                                    pk_curl_part right, const double complex *l,
                                    const double complex *r);
double complex pk_channel_block_form(const pk_channel *channel, const pk_block *block,
                                     const double complex *l, const double complex *r);

/* vectors.c */
void pk_channel_scale(const pk_channel *channel, double complex *e); /* unit norm, largest real */
/* |T e| over |k0² M e|, or with Tᵀ and Mᵀ; T e is left in work [n]. */
double pk_channel_residual_of(const pk_channel *channel, double complex k, double complex k0_square,
                              bool transposed, const double complex *e, double complex *work);
/* Makes `left` an alias of `right`, or a vector of its own: conj(right). */
picket_status pk_channel_guess_left(const pk_channel *channel, pk_channel_mode *mode);
picket_status pk_channel_judge(const pk_channel *channel, const pk_channel_mode *mode);
/* A fixed start vector for iterations, real. */
/* Drops the imaginary part of a scaled vector where the last factor is real: of a real matrix it is
 * rounding, and real vectors are solved for at half the cost. */
void pk_channel_make_real(const pk_channel *c, double complex *e);
void pk_channel_start(const pk_channel *channel, const double complex *guess, double complex *out);

/* Ground that both ways to waves work on. */
typedef struct pk_channel_wave_work {
  double k0_square;
  double complex *work, *other; /* [n] each */
} pk_channel_wave_work;

/* waves_mirrored.c, waves_general.c: up to `wanted` waves into modes, in any order; *found counts
 * those that need clearing, on failure too. */
picket_status pk_channel_waves_mirrored(pk_channel *channel, const pk_channel_wave_work *ground,
                                        double complex guess, int wanted,
                                        const double complex *start, pk_channel_mode *modes,
                                        int *found);
picket_status pk_channel_waves_general(pk_channel *channel, const pk_channel_wave_work *ground,
                                       double complex guess, int wanted,
                                       const double complex *start, pk_channel_mode *modes,
                                       int *found);

/* factor.c: LU factors of T(k), real where they can be, and solves with them. */
picket_status pk_channel_factor(pk_channel *channel, double complex k, double complex k0_square);
picket_status pk_channel_solve(pk_channel *channel, const double complex *b, double complex *x);
picket_status pk_channel_solve_transposed(pk_channel *channel, const double complex *b,
                                          double complex *x);
void pk_channel_drop_factors(pk_channel *channel);

#endif
