/* From a document to an understood problem: what is allowed where.
 *
 * pk_problem_read is the entry; the rest is shared between the files read_*.c, one per block of the
 * problem file. Each block has one table of its keys. Every message begins with the place and the
 * dotted path of the value it is about. */
#ifndef PK_IO_READ_H
#define PK_IO_READ_H

#include "io/document.h"
#include "study/problem.h"

/* Checks a whole document and makes a problem of it. Places of the problem borrow the document. */
picket_status pk_problem_read(picket_context *context, const pk_document *document,
                              pk_problem **out);

/* ---- values ---- */

enum { PK_BLOCK_KEYS = 16 }; /* the most keys one table has */

typedef struct pk_key {
  const char *name;
  bool required;
} pk_key;

/* Finds the keys of a table in a block: values[i] is the value of keys[i], null if left out. Fails
 * for anything but a block, an unknown key and a missing required one. */
picket_status pk_read_block(picket_context *context, const pk_node *node, const pk_key *keys,
                            int count, const pk_node **values);

/* A block with exactly one key out of `kinds`, such as {rect: {...}}; *kind is its number. */
picket_status pk_read_kind(picket_context *context, const pk_node *node, const char *const *kinds,
                           int count, int *kind, const pk_node **value);

/* What a number must be. Bounds that are not finite do not bind. */
typedef struct pk_limits {
  double low, high;
  bool low_open, high_open; /* the bound itself is not allowed */
  bool infinite;            /* .inf and -.inf are allowed */
  const char *unit;         /* for messages, "" for none */
} pk_limits;

picket_status pk_read_number(picket_context *context, const pk_node *node, const pk_limits *limits,
                             double *out);
/* A list of `count` numbers. */
picket_status pk_read_numbers(picket_context *context, const pk_node *node, const pk_limits *limits,
                              int count, double *out);
picket_status pk_read_whole(picket_context *context, const pk_node *node, int low, int high,
                            int *out);
/* A list of `low` to `high` elements of any kind, called `what` in messages. */
picket_status pk_read_list(picket_context *context, const pk_node *node, int low, int high,
                           const char *what);
/* One word out of `words`. */
picket_status pk_read_choice(picket_context *context, const pk_node *node, const char *const *words,
                             int count, int *out);
/* A text that is not empty, at most `longest` bytes; borrowed. */
picket_status pk_read_text(picket_context *context, const pk_node *node, size_t longest,
                           const char **out);

/* Words in a row for a message: "a, b, c". */
typedef struct pk_word_list {
  char text[300];
} pk_word_list;
pk_word_list pk_words_joined(const char *const *words, int count);

/* Ends a message about an unknown word: "did you mean \"x\"?" or the words that are allowed. */
pk_word_list pk_words_advice(const char *word, const char *const *words, int count);

/* ---- blocks ---- */

typedef struct pk_reader {
  picket_context *context;
  const char *folder;       /* of the problem file, for tables */
  const pk_node *materials; /* the block, or null */
  pk_problem *problem;      /* being filled */
  bool layered;             /* layered materials may stand here */
} pk_reader;

picket_status pk_read_light(pk_reader *reader, const pk_node *node);
picket_status pk_read_materials(pk_reader *reader);
picket_status pk_read_slab(pk_reader *reader, const pk_node *node);
picket_status pk_read_cell(pk_reader *reader, const pk_node *node);
picket_status pk_read_section(pk_reader *reader, const pk_node *node);
picket_status pk_read_channel(pk_reader *reader, const pk_node *node);
picket_status pk_read_path(pk_reader *reader, const pk_node *node);
/* After all blocks that can be varied. */
picket_status pk_read_aim(pk_reader *reader, const pk_document *document, const pk_node *node);
picket_status pk_read_tolerance(pk_reader *reader, const pk_document *document,
                                const pk_node *node);
picket_status pk_read_taper(pk_reader *reader, const pk_document *document, const pk_node *node);
picket_status pk_read_rules(pk_reader *reader, const pk_node *node);

/* The path of a single number of the document that can be varied; the text is the caller's. */
picket_status pk_read_vary(const pk_reader *reader, const pk_document *document,
                           const pk_node *node, char **out);
picket_status pk_read_measured(picket_context *context, const pk_node *node, pk_measured *out);
/* at_nm of a block: of a quantity at one wavelength it is needed, with any other it would say
 * nothing and *at_um is NaN. */
picket_status pk_read_at(picket_context *context, const pk_node *block, const pk_node *node,
                         pk_measured quantity, double *at_um);

/* The number of the material that a value names. */
picket_status pk_read_material(const pk_reader *reader, const pk_node *node, int *out);
/* Fails unless a value names a key of `materials`. */
picket_status pk_read_material_name(const pk_reader *reader, const pk_node *node, const char **out);

/* Keys that a film stack has wherever it stands. */
enum { PK_STACK_SUBSTRATE, PK_STACK_FILMS, PK_STACK_COVER, PK_STACK_KEYS };
/* Films of a list, for `values` in the order of the keys above: materials into the recipe, whose
 * arrays are then the caller's. */
picket_status pk_read_stack(const pk_reader *reader, const pk_node *const *values,
                            pk_slab_recipe *recipe);
/* Films of a list alone. */
picket_status pk_read_films(const pk_reader *reader, const pk_node *list, pk_slab_recipe *recipe);
void pk_slab_recipe_clear(picket_context *context, pk_slab_recipe *recipe);

/* ---- shapes ---- */

typedef enum pk_shape_kind {
  PK_SHAPE_RECT,
  PK_SHAPE_DISC,
  PK_SHAPE_POLYGON,
  PK_SHAPE_STRIPE
} pk_shape_kind;

/* What is particular to the shapes of a block. */
typedef struct pk_shape_plane {
  char letter[2];                 /* of the axes u and v */
  const char *rect_size[2];       /* keys of a rect's size along u and v */
  double farthest_nm, largest_nm; /* bounds of coordinates and of sizes */
  bool seen_from_above;           /* v is not the height: walls cannot lean in this plane */
  double pitch_nm;                /* above 0: shapes may have a range along z, inside the pitch */
} pk_shape_plane;

/* A shape as the file says it, nm. */
typedef struct pk_shape {
  const pk_node *node;
  pk_shape_kind kind;
  int material;
  double at[2], size[2];  /* of a rect and a disc */
  double radius;          /* of a rect's corners */
  double lean;            /* of a rect's side walls from the vertical, rad */
  pk_axis_name across;    /* of a stripe */
  int corner_count;       /* of a polygon */
  double (*corners)[2];   /* lives as long as the call that hands it on */
  double low[2], high[2]; /* extent; a stripe is endless along the other axis */
  double along[2];        /* range of z; the whole pitch unless the file says less */
} pk_shape;

/* Receives the shapes one after the other. */
typedef picket_status pk_shape_taker(void *owner, const pk_shape *shape);

picket_status pk_read_shapes(const pk_reader *reader, const pk_node *list,
                             const pk_shape_plane *plane, pk_shape_taker *take, void *owner);
picket_status pk_shape_paint(picket_context *context, const pk_shape *shape, pk_geometry *geometry);

/* Paints the shapes of a list into the geometry of the cell, which they must fit. */
picket_status pk_read_cell_shapes(const pk_reader *reader, const pk_node *list, pk_cell *cell);

/* A plane across a guide, of a section or a channel. pk_read_plane_open marks the materials and
 * prepares the extent; pk_read_plane_note adds a shape to both. */
extern const pk_shape_plane PK_PLANE_ACROSS; /* pitch_nm is 0 */
picket_status pk_read_plane_open(pk_reader *reader, int cladding, const pk_node *span,
                                 pk_section_block *block);
picket_status pk_read_plane_create(picket_context *context, int cladding, pk_geometry **out);
void pk_read_plane_note(const pk_shape *shape, pk_section_block *block);
/* Fails if nothing says where the guide is. `what` is the block's name. */
picket_status pk_read_plane_check(const pk_reader *reader, const pk_node *node, const char *what,
                                  const pk_section_block *block);

/* A table of wavelength_nm,n,k as a CSV file. Arrays are the caller's. */
typedef struct pk_index_table {
  int count;
  double *wavelength_um, *n, *k;
} pk_index_table;
picket_status pk_read_index_table(picket_context *context, pk_place named_at, const char *path,
                                  pk_index_table *out);
void pk_index_table_clear(picket_context *context, pk_index_table *table);

/* ---- units and limits that several blocks share ---- */

static const double PK_NM_PER_UM = 1000.0;
static const double PK_WAVELENGTH_LOW_NM = 10.0; /* soft X-rays and below: no guide has an index */
static const double PK_WAVELENGTH_HIGH_NM = 1e6; /* 1 mm, the end of the optical range */
static const double PK_LENGTH_HIGH_NM = 1e6;     /* 1 mm: no cell or film is larger */
/* Of a period: a length computed from a file's decimals may miss the border by rounding. */
static const double PK_BORDER_TOLERANCE = 1e-9;

#endif
