/* Names of the status codes and the version of the library. */
#include <picket/context.h>
#include <picket/status.h>
#include <picket/version.h>

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

const char *picket_status_text(picket_status status) {
  switch (status) {
    case PICKET_OK: return "done";
    case PICKET_ERROR_ARGUMENT: return "an argument is outside of what is allowed";
    case PICKET_ERROR_INPUT: return "something in the problem is wrong";
    case PICKET_ERROR_MEMORY: return "memory ran out";
    case PICKET_ERROR_FILE: return "a file could not be read";
    case PICKET_ERROR_NUMERIC: return "the numbers could not be obtained";
    case PICKET_ERROR_RANGE: return "a material is not known at this wavelength or temperature";
    case PICKET_ERROR_NO_MODE: return "there is no such mode";
    case PICKET_ERROR_STOPPED: return "stopped on request";
    case PICKET_ERROR_BUSY: return "another call is using the context";
    case PICKET_ERROR_UNSUPPORTED: return "this version does not do that";
    case PICKET_ERROR_INTERNAL: return "an internal check failed: a defect of the library";
    case PICKET_ERROR_OUTPUT: return "a file could not be written";
  }
  return "unknown status";
}

const char *picket_version(void) {
  return PICKET_VERSION;
}
