/* The items of a summary, as they are added one by one. For the files of this room. */
#ifndef PK_STUDY_SUMMARY_LIST_H
#define PK_STUDY_SUMMARY_LIST_H

#include "study/problem.h"
#include "study/result.h"

/* A summary being written. After a failure every further call returns it at once, so that a writer
 * looks at `status` only when it is done. */
typedef struct pk_summary_list {
  picket_result *result;
  int capacity;
  picket_status status;
} pk_summary_list;

/* Adds a number or a text. The name is `block`, `entry` (may be null) and `what` with dots between.
 */
void pk_summary_number(pk_summary_list *list, const char *block, const char *entry,
                       const char *what, double value, const char *unit);
void pk_summary_text(pk_summary_list *list, const char *block, const char *entry, const char *what,
                     const char *text);

/* What was understood of the problem's channel. */
void pk_summary_channel(pk_summary_list *list, const pk_problem *problem);

/* The lines for people: names in one column, values in the next. */
picket_status pk_summary_write_lines(picket_result *result);

#endif
