/* Inside of the writer of JSON: values for the files that describe one kind of result each. Only
 * json.c knows what a value is. Null is a value that could not be made; whatever it is put into
 * fails with it (see json.c). */
#ifndef PK_IO_JSON_PRIVATE_H
#define PK_IO_JSON_PRIVATE_H

#include <stdbool.h>

#include <picket/quantity.h>

struct json_t;

struct json_t *pk_json_object(void);
struct json_t *pk_json_list(void);
/* Both take over `value`; false if something is null. */
bool pk_json_put(struct json_t *object, const char *key, struct json_t *value);
bool pk_json_append(struct json_t *list, struct json_t *value);
/* The value if all went well, else null. */
struct json_t *pk_json_finish(struct json_t *value, bool good);

struct json_t *pk_json_number(double value); /* null where it is not finite */
struct json_t *pk_json_whole(int value);
struct json_t *pk_json_text(const char *value); /* or null */
struct json_t *pk_json_verdict(int known);      /* 1 true, 0 false, -1 null */
struct json_t *pk_json_quantity(picket_quantity q, double scale);

/* ---- kinds of results; `user` is the picket_result ---- */

struct json_t *pk_json_aim(const void *user, int i); /* json_aim.c */
/* Of answer i of edges; json_compare.c. */
struct json_t *pk_json_comparisons(const void *user, int i);
struct json_t *pk_json_taper(const void *user, int i);     /* json_taper.c */
struct json_t *pk_json_tolerance(const void *user, int i); /* json_tolerance.c */

#endif
