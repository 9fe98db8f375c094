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
picket_status pk_read_path(pk_reader *reader, const pk_node *node);

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

/* Paints the shapes of a list into the geometry of the cell. */
picket_status pk_read_shapes(const pk_reader *reader, const pk_node *list, pk_cell *cell);

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

#endif
