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

static const char *document(picket_result *result, char **kept, document_writer write) {
  if (!*kept && pk_border_enter(result->context) == PICKET_OK) {
    (void)pk_border_leave(result->context, write(result, kept));
  }
  return *kept;
}

const char *picket_result_json(picket_result *result) {
  return result ? document(result, &result->json, pk_json_write) : NULL;
}

const char *picket_result_csv(picket_result *result) {
  return result ? document(result, &result->csv, pk_csv_write) : NULL;
}

void picket_result_free(picket_result *result) {
  pk_result_free(result);
}
