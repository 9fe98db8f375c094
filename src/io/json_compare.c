/* The JSON of a channel's two-dimensional models. See json_private.h. */
#include "io/json_private.h"
#include "io/write.h"

static struct json_t *comparison_of(const picket_edge_comparison *c) {
  struct json_t *object = pk_json_object();
  bool good = pk_json_put(object, "method", pk_json_text(c->method)) &&
              pk_json_put(object, "long_nm", pk_json_quantity(c->long_um, PK_NM_OF_UM)) &&
              pk_json_put(object, "error_nm", pk_json_quantity(c->error_um, PK_NM_OF_UM));
  return pk_json_finish(object, good);
}

struct json_t *pk_json_comparisons(const void *user, int answer) {
  const picket_result *result = user;
  struct json_t *list = pk_json_list();
  bool good = list != NULL;
  for (int i = 0; good && i < result->comparison_count; i++) {
    if (result->comparison[i].answer == answer) {
      good = pk_json_append(list, comparison_of(&result->comparison[i]));
    }
  }
  return pk_json_finish(list, good);
}
