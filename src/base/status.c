/* Names of the status codes and the version of the library. */
#include <picket/context.h>
#include <picket/status.h>

const char *picket_status_name(picket_status status) {
  switch (status) {
    case PICKET_OK: return "PICKET_OK";
    case PICKET_ERROR_ARGUMENT: return "PICKET_ERROR_ARGUMENT";
    case PICKET_ERROR_INPUT: return "PICKET_ERROR_INPUT";
    case PICKET_ERROR_MEMORY: return "PICKET_ERROR_MEMORY";
    case PICKET_ERROR_FILE: return "PICKET_ERROR_FILE";
    case PICKET_ERROR_NUMERIC: return "PICKET_ERROR_NUMERIC";
    case PICKET_ERROR_RANGE: return "PICKET_ERROR_RANGE";
    case PICKET_ERROR_NO_MODE: return "PICKET_ERROR_NO_MODE";
    case PICKET_ERROR_STOPPED: return "PICKET_ERROR_STOPPED";
    case PICKET_ERROR_BUSY: return "PICKET_ERROR_BUSY";
    case PICKET_ERROR_UNSUPPORTED: return "PICKET_ERROR_UNSUPPORTED";
    case PICKET_ERROR_INTERNAL: return "PICKET_ERROR_INTERNAL";
    case PICKET_ERROR_OUTPUT: return "PICKET_ERROR_OUTPUT";
  }
  return "unknown status";
}

const char *picket_version(void) {
  return PICKET_VERSION;
}
