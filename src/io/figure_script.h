/* The script of a picture being written, for the files that draw one kind of result each, and the
 * one look that all pictures have. */
#ifndef PK_IO_FIGURE_SCRIPT_H
#define PK_IO_FIGURE_SCRIPT_H

#include "io/csv_sheet.h"
#include "io/figure.h"
#include "io/write.h"

/* Inks and shades, told apart by their lightness alone too, and by every kind of colour vision. */
#define PK_INK "#222222"
#define PK_FAINT "#6b6b6b"
#define PK_SLATE "#4a5a6a" /* stop bands */
#define PK_SAND "#f0d9a6"  /* the operating band */
#define PK_MIST "#e3e6ea"  /* what leaks: above the light line, radiating */
#define PK_RUST "#a8480e"  /* estimates */

enum {
  PK_FIGURE_WIDTH = 900, /* of the page, in dots of the terminals that have dots */
  PK_LABEL_MOST = 90,    /* characters of a text of the file */
  PK_LINE_MOST = 138,    /* of a line under a picture: as many as the page is wide */
  PK_LETTER = 8,         /* dots that a character of the usual size takes at most, on average */
  PK_CURVES = 6          /* looks of curves; further ones begin again */
};

typedef struct pk_figure {
  sheet s; /* of csv_sheet.h: a text that grows */
  const picket_result *result;
  const pk_problem *problem;
  const picket_figure_options *options;
  int height;
  int line;          /* of text under the picture so far */
  bool after_escape; /* of a string, at its end so far */
  bool in_format;    /* texts are labels of tics, in which % is a format unless doubled */
} pk_figure;

void pk_put(pk_figure *f, const char *format, ...) __attribute__((format(printf, 2, 3)));
/* A space and a number, all its digits; NaN where there is none. */
void pk_put_value(pk_figure *f, double value);
void pk_put_bar(pk_figure *f, picket_quantity quantity, double scale); /* value and bar */
/* A text of the file, or any other, as a gnuplot string in which nothing has a meaning. What cannot
 * be shown is written as an escape (\n, \u202e); cut at `most` characters. Inside the string stands
 * `before` in front of it. */
void pk_put_text(pk_figure *f, const char *before, const char *text, int most);

/* The look, the page, and the lines at its top: the name of the problem and what the picture
 * shows. */
void pk_figure_open(pk_figure *f, const char *shows, int height);
/* A faint line of text at the bottom of the page, from `rows` lines above its end downwards. */
void pk_figure_say(pk_figure *f, int rows, const char *text);

/* Forgets the lines of text that were drawn with the first panel of several. */
void pk_figure_said(pk_figure *f);

/* Tics of an axis ("x" or "y") over `dots`, as many as have room for their numbers. */
void pk_figure_tics(pk_figure *f, const char *axis, double from, double to, int dots);

/* The vertical range of the next panel: as the data have it, or one that says there are none, for
 * gnuplot refuses to find a range without a value. */
void pk_figure_range(pk_figure *f, bool any);

/* The place of a panel on the page, in dots from the left and the top. */
void pk_figure_place(pk_figure *f, int left, int right, int top, int bottom);

/* Bars of a plot are arrows with flat heads: error bars proper would blank out what
 * is under their middle. */
#define PK_BARS "with vectors heads size screen 0.004,90 lw 1.2"

/* How curve i looks: " lc ... dt ... pt ...". */
const char *pk_figure_look(int i);

/* 12.345 ± 0.012: the bar with two digits, rounded up; "12.345 ± ?" without one. */
typedef struct pk_words {
  char text[64];
} pk_words;
pk_words pk_figure_quantity(picket_quantity quantity, double scale);

/* The operating band of the problem, nm; false without light. */
bool pk_figure_light(const pk_problem *problem, double *from_nm, double *to_nm);

/* ---- kinds of pictures ----
 * PICKET_ERROR_UNSUPPORTED, message set, if nothing could be drawn. */
picket_status pk_figure_edges(pk_figure *f);     /* figure_edges.c */
picket_status pk_figure_bands(pk_figure *f);     /* figure_bands.c */
picket_status pk_figure_index(pk_figure *f);     /* figure_index.c */
picket_status pk_figure_modes(pk_figure *f);     /* figure_modes.c */
picket_status pk_figure_slab(pk_figure *f);      /* figure_modes.c */
picket_status pk_figure_problem(pk_figure *f);   /* figure_map.c */
picket_status pk_figure_taper(pk_figure *f);     /* figure_taper.c */
picket_status pk_figure_tolerance(pk_figure *f); /* figure_tolerance.c */

/* ---- figure_map.c ---- */

/* A painted plane on the page. */
typedef struct pk_map {
  const pk_geometry *geometry;
  const char *block;      /* of data, e.g. "cell": a word of ours */
  const char *label[2];   /* of the axes */
  double low[2], high[2]; /* the window, µm */
  int left, top;          /* on the page, dots */
  int width, height;      /* at equal scales where that can be */
} pk_map;

/* The section of the file, as large as there is room. */
pk_map pk_map_of_section(const pk_section_block *section, int left, int top, int width, int height);
/* Its data and its plot; `key`: with the materials at its right, PK_KEY_WIDTH dots wide. */
enum { PK_KEY_WIDTH = 220 };
picket_status pk_map_put(pk_figure *f, const pk_map *map, bool key);

#endif
