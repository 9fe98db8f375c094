/* What every call from outside does first and last. For the files of this room. */
#ifndef PK_API_BORDER_H
#define PK_API_BORDER_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#include "study/problem.h"
#include "study/result.h"

/* Marks the context as in use and forgets its last message. PICKET_ERROR_BUSY (message untouched,
 * for it belongs to the other thread) if a call is inside. */
picket_status pk_border_enter(picket_context *context);
/* Ends the call and passes its status on. */
picket_status pk_border_leave(picket_context *context, picket_status status);

/* A study that takes options. */
typedef picket_status (*pk_study)(const pk_problem *problem, const picket_options *options,
                                  picket_result **out);

/* What a study needs, inside an entered context: options checked (null: the defaults) and copied to
 * `chosen`, the problem understood. PICKET_ERROR_ARGUMENT if `out` is null. */
picket_status pk_border_prepare(picket_problem *problem, const picket_options *options,
                                picket_result **out, picket_options *chosen,
                                const pk_problem **understood);

/* The whole of picket_<study>_find: checks, understands the problem, runs the study. */
picket_status pk_border_study(picket_problem *problem, const picket_options *options,
                              picket_result **out, pk_study study);

/* What a question to a finished object ends with when it is wrong: PICKET_ERROR_ARGUMENT, with a
 * message unless another call is using the context. */
picket_status pk_border_refuse(picket_context *context, const char *format, ...)
    __attribute__((format(printf, 2, 3)));

/* PICKET_OK if the result has answer i of a kind and there is a place for it. */
picket_status pk_border_answer(const picket_result *result, pk_result_kind kind, int i,
                               const void *out);

/* Answers of a result: 0 if it is null or of another kind. */
int pk_border_count(const picket_result *result, pk_result_kind kind);

#endif
