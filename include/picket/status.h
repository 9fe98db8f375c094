/* Status codes. Zero is success, negative is failure. A number is never changed or reused. */
#ifndef PICKET_STATUS_H
#define PICKET_STATUS_H

#include <picket/export.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef enum picket_status {
  PICKET_OK = 0,
  /* The caller passed something outside the allowed range (null, NaN, wrong size). */
  PICKET_ERROR_ARGUMENT = -1,
  /* A problem file or value is wrong: unknown key, wrong type, value out of range. */
  PICKET_ERROR_INPUT = -2,
  /* Memory ran out; everything acquired was released. */
  PICKET_ERROR_MEMORY = -3,
  /* A file could not be read. */
  PICKET_ERROR_FILE = -4,
  /* The numbers could not be obtained: an iteration failed or a residual was too large. */
  PICKET_ERROR_NUMERIC = -5,
  /* A material was asked for outside the wavelengths or temperatures it is known for. */
  PICKET_ERROR_RANGE = -6,
  /* There is no such mode: the guide, slab or cell does not support it. */
  PICKET_ERROR_NO_MODE = -7,
  /* The progress callback asked to stop. */
  PICKET_ERROR_STOPPED = -8,
  /* The context is in use by another thread. */
  PICKET_ERROR_BUSY = -9,
  /* The request is understood but this version does not do it. */
  PICKET_ERROR_UNSUPPORTED = -10,
  /* An internal check failed: a defect of the library. */
  PICKET_ERROR_INTERNAL = -11,
  /* A file that the library keeps for the caller could not be written. */
  PICKET_ERROR_OUTPUT = -12
} picket_status;

/* The name of a status code, e.g. "PICKET_ERROR_INPUT"; "unknown status" for any other number.
 * Static text, never null. */
PICKET_EXPORT const char *picket_status_name(picket_status status);

/* What a status code means, one sentence without a full stop, for where there is no context with a
 * message of its own. Static text, never null. */
PICKET_EXPORT const char *picket_status_text(picket_status status);

#ifdef __cplusplus
}
#endif

#endif
