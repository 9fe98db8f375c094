/* See picket/result.h. Documents are written at the first call and kept with the result. */
#include "api/border.h"
#include "io/write.h"

const char *picket_polarization_name(picket_polarization polarization) {
  switch (polarization) {
    case PICKET_EY: return "ey";
    case PICKET_HY: return "hy";
    case PICKET_TM_LIKE: return "tm-like";
    case PICKET_TE_LIKE: return "te-like";
  }
  return "unknown";
}

const char *picket_regime_name(picket_regime regime) {
  switch (regime) {
    case PICKET_REGIME_SUBWAVELENGTH: return "subwavelength";
    case PICKET_REGIME_STOP_BAND: return "stop-band";
    case PICKET_REGIME_RADIATING: return "radiating";
    case PICKET_REGIME_UNKNOWN: break;
  }
  return "unknown";
}

bool picket_result_complete(const picket_result *result) {
  return result && result->complete;
}

const char *picket_result_shortfall(const picket_result *result) {
  return result && result->shortfall ? result->shortfall : "";
}

typedef picket_status (*document_writer)(const picket_result *result, char **out);

static picket_status document(picket_result *result, char **kept, document_writer write,
                              const char **out) {
  if (!out) {
    return pk_border_refuse(result->context, "out is null, must be the address of a text");
  }
  picket_status status = PICKET_OK;
  if (!*kept) {
    status = pk_border_enter(result->context);
    if (status == PICKET_OK) {
      status = pk_border_leave(result->context, write(result, kept));
    }
  }
  if (status == PICKET_OK) {
    *out = *kept;
  }
  return status;
}

picket_status picket_result_json_get(picket_result *result, const char **out) {
  return result ? document(result, &result->json, pk_json_write, out) : PICKET_ERROR_ARGUMENT;
}

picket_status picket_result_csv_get(picket_result *result, const char **out) {
  return result ? document(result, &result->csv, pk_csv_write, out) : PICKET_ERROR_ARGUMENT;
}

const char *picket_result_json(picket_result *result) {
  const char *text = NULL;
  return picket_result_json_get(result, &text) == PICKET_OK ? text : NULL;
}

const char *picket_result_csv(picket_result *result) {
  const char *text = NULL;
  return picket_result_csv_get(result, &text) == PICKET_OK ? text : NULL;
}

void picket_result_free(picket_result *result) {
  pk_result_free(result);
}
