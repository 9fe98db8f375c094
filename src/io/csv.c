/* Results as comma-separated values: RFC 4180 fields, one line feed after each row. See write.h. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "io/csv_private.h"
#include "io/csv_sheet.h"
#include "io/number.h"
#include "io/write.h"

enum { COLUMN_NAME = 40 };

static void put_operating(sheet *s, const picket_operating_band *band) {
  const picket_quantity none = {NAN, NAN, NULL};
  put_number(s, band->given ? PK_NM_OF_UM * band->from_um : NAN);
  put_number(s, band->given ? PK_NM_OF_UM * band->to_um : NAN);
  put_text(s, band->given ? picket_regime_name(band->regime) : NULL);
  put_quantity(s, band->given ? band->clearance_um : none, PK_NM_OF_UM);
}

static void write_edges(sheet *s, const picket_result *result) {
  static const char *const header[] = {"polarization",
                                       "order",
                                       "short_nm",
                                       "short_uncertainty_nm",
                                       "short_confined",
                                       "long_nm",
                                       "long_uncertainty_nm",
                                       "long_confined",
                                       "attenuation_db_per_pitch",
                                       "attenuation_uncertainty_db_per_pitch",
                                       "operating_from_nm",
                                       "operating_to_nm",
                                       "regime",
                                       "clearance_nm",
                                       "clearance_uncertainty_nm",
                                       "estimate_centre_nm",
                                       "estimate_error_nm",
                                       "estimate_error_uncertainty_nm",
                                       NULL};
  put_header(s, header);
  put_failure_header(s);
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    const picket_edges_answer *answer = &result->edges[i];
    s->answer = i;
    if (answer->failed) {
      put_text(s, pk_word_polarization(answer->polarization));
      put_failed_row(s, (int)(sizeof header / sizeof header[0]) - 2, answer->note);
    }
    for (int b = 0; b < answer->band_count; b++) {
      const picket_stop_band *band = &answer->bands[b];
      put_text(s, pk_word_polarization(answer->polarization));
      put_number(s, band->order);
      put_quantity(s, band->short_um, PK_NM_OF_UM);
      put_flag(s, band->short_confined);
      put_quantity(s, band->long_um, PK_NM_OF_UM);
      put_flag(s, band->long_confined);
      put_quantity(s, band->attenuation_db_per_pitch, 1);
      put_operating(s, &answer->operating);
      put_number(s, PK_NM_OF_UM * answer->estimate.centre_um);
      put_quantity(s, answer->estimate.error_um, PK_NM_OF_UM);
      put_failure(s, false, NULL);
      end_row(s);
    }
  }
}

static void put_frequencies(sheet *s, const picket_bands_answer *answer, int point, int columns) {
  const picket_quantity none = {NAN, NAN, NULL};
  for (int b = 0; b < columns; b++) {
    put_quantity(s, b < answer->band_count ? answer->points[point].frequency[b] : none, 1);
  }
}

static void write_bands(sheet *s, const picket_result *result) {
  static const char *const header[] = {
      "polarization", "point", "label", "kz_pi_per_pitch", "kx_pi_per_lateral_span", NULL};
  int columns = 0;
  for (int i = 0; i < result->count; i++) {
    columns = result->bands[i].band_count > columns ? result->bands[i].band_count : columns;
  }
  put_header(s, header);
  for (int b = 1; b <= columns; b++) {
    char name[COLUMN_NAME];
    snprintf(name, sizeof name, "band_%d_pitch_per_wavelength", b);
    put_text(s, name);
    snprintf(name, sizeof name, "band_%d_uncertainty", b);
    put_text(s, name);
  }
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    const picket_bands_answer *answer = &result->bands[i];
    for (int p = 0; p < answer->point_count; p++) {
      put_text(s, pk_word_polarization(answer->polarization));
      put_number(s, p);
      put_text(s, answer->points[p].label);
      put_number(s, answer->points[p].kz);
      put_number(s, answer->points[p].kx);
      put_frequencies(s, answer, p, columns);
      end_row(s);
    }
  }
}

static void write_slab_point(sheet *s, const picket_slab_answer *answer,
                             const picket_slab_point *point) {
  for (int m = 0; m < point->mode_count; m++) {
    put_text(s, pk_word_slab_polarization(answer->polarization));
    put_number(s, PK_NM_OF_UM * point->wavelength_um);
    put_number(s, point->modes[m].order);
    put_quantity(s, point->modes[m].index, 1);
    put_quantity(s, point->modes[m].group_index, 1);
    put_failure(s, false, NULL);
    end_row(s);
  }
}

static void write_edge_derivatives(sheet *s, const picket_result *result) {
  static const char *const header[] = {"polarization",
                                       "order",
                                       "short_nm_per_unit",
                                       "short_uncertainty_nm_per_unit",
                                       "long_nm_per_unit",
                                       "long_uncertainty_nm_per_unit",
                                       NULL};
  put_header(s, header);
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    const picket_edge_derivatives *answer = &result->edge_derivatives[i];
    for (int b = 0; b < answer->band_count; b++) {
      put_text(s, pk_word_polarization(answer->polarization));
      put_number(s, answer->bands[b].order);
      put_quantity(s, answer->bands[b].short_um, PK_NM_OF_UM);
      put_quantity(s, answer->bands[b].long_um, PK_NM_OF_UM);
      end_row(s);
    }
  }
}

static void write_index_derivatives(sheet *s, const picket_result *result) {
  static const char *const header[] = {"polarization", "wavelength_nm", "bloch_index_per_unit",
                                       "bloch_index_uncertainty_per_unit", NULL};
  put_header(s, header);
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    const picket_index_derivatives *answer = &result->index_derivatives[i];
    for (int p = 0; p < answer->point_count; p++) {
      put_text(s, pk_word_polarization(answer->polarization));
      put_number(s, PK_NM_OF_UM * answer->points[p].wavelength_um);
      put_quantity(s, answer->points[p].bloch_index, 1);
      end_row(s);
    }
  }
}

static void write_slab(sheet *s, const picket_result *result) {
  static const char *const header[] = {
      "polarization", "wavelength_nm",           "order", "index", "index_uncertainty",
      "group_index",  "group_index_uncertainty", NULL};
  put_header(s, header);
  put_failure_header(s);
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    s->answer = i;
    if (result->slab[i].failed) {
      put_text(s, pk_word_slab_polarization(result->slab[i].polarization));
      put_failed_row(s, (int)(sizeof header / sizeof header[0]) - 2, result->slab[i].note);
    }
    for (int p = 0; p < result->slab[i].point_count; p++) {
      write_slab_point(s, &result->slab[i], &result->slab[i].points[p]);
    }
  }
}

static void put_diameters(sheet *s, const picket_mode_diameters *d) {
  const picket_quantity *all = (const picket_quantity *)d; /* it is made of nothing else */
  for (size_t i = 0; i < sizeof *d / sizeof *all; i++) {
    put_quantity(s, all[i], 1);
  }
}

static void write_modes_point(sheet *s, const picket_modes_point *point) {
  for (int m = 0; m < point->mode_count; m++) {
    const picket_section_mode *mode = &point->modes[m];
    put_number(s, PK_NM_OF_UM * point->wavelength_um);
    put_number(s, mode->order);
    put_quantity(s, mode->index, 1);
    put_quantity(s, mode->group_index, 1);
    put_quantity(s, mode->loss_db_per_cm, 1);
    put_quantity(s, mode->bend_loss_db_per_90_deg, 1);
    put_number(s, mode->ex_share);
    put_quantity(s, mode->effective_area_um2, 1);
    put_number(s, mode->nodes_x);
    put_number(s, mode->nodes_y);
    put_diameters(s, &mode->diameters);
    put_flag(s, false);
    put_text(s, point->note);
    end_row(s);
  }
}

/* A point without modes; `between` columns of modes stay empty. */
static void write_no_modes(sheet *s, const picket_modes_point *point, int between) {
  put_number(s, PK_NM_OF_UM * point->wavelength_um);
  for (int i = 0; i < between; i++) {
    put_text(s, NULL);
  }
  put_flag(s, point->failed);
  put_text(s, point->note);
  end_row(s);
}

static void write_modes(sheet *s, const picket_result *result) {
  static const char *const header[] = {"wavelength_nm",
                                       "order",
                                       "index",
                                       "index_uncertainty",
                                       "group_index",
                                       "group_index_uncertainty",
                                       "loss_db_per_cm",
                                       "loss_uncertainty_db_per_cm",
                                       "bend_loss_db_per_90_deg",
                                       "bend_loss_uncertainty_db_per_90_deg",
                                       "ex_share",
                                       "effective_area_um2",
                                       "effective_area_uncertainty_um2",
                                       "nodes_x",
                                       "nodes_y",
                                       PK_CSV_DIAMETERS,
                                       "failed",
                                       "note",
                                       NULL};
  enum { COLUMNS = sizeof header / sizeof header[0] - 1 };
  put_header(s, header);
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    s->answer = i;
    for (int p = 0; p < result->modes[i].point_count; p++) {
      const picket_modes_point *point = &result->modes[i].points[p];
      write_modes_point(s, point);
      if (point->mode_count == 0) {
        write_no_modes(s, point, COLUMNS - 3); /* wavelength, failed, note */
      }
    }
  }
}

static void write_coupling(sheet *s, const picket_coupling *c) {
  put_quantity(s, c->share, 1);
  put_quantity(s, c->share_db, 1);
  put_quantity(s, c->offset_x_um, PK_NM_OF_UM);
  put_quantity(s, c->offset_y_um, PK_NM_OF_UM);
}

static void write_match(sheet *s, const picket_result *result) {
  static const char *const header[] = {PK_CSV_MATCH, NULL};
  put_header(s, header);
  end_row(s);
  for (int p = 0; p < result->match->point_count; p++) {
    const picket_match_point *point = &result->match->points[p];
    put_number(s, PK_NM_OF_UM * point->wavelength_um);
    put_number(s, result->match->request.mode);
    put_number(s, point->mode_b < 0 ? NAN : point->mode_b);
    put_quantity(s, point->index, 1);
    put_quantity(s, point->index_b, 1);
    write_coupling(s, &point->coupling);
    write_coupling(s, &point->best);
    put_text(s, point->note);
    end_row(s);
  }
}

/* Columns of an index row besides polarization, wavelength, order and what follows the regime. */
static const picket_quantity *index_quantity(const picket_bloch_mode *mode, int i) {
  const picket_quantity *const all[] = {&mode->bloch_index,
                                        &mode->group_index,
                                        &mode->dispersion_ps_per_nm_km,
                                        &mode->loss_db_per_cm,
                                        &mode->loss_db_per_pitch,
                                        &mode->absorption_db_per_cm,
                                        &mode->radiation_db_per_cm,
                                        &mode->radiation_per_mm,
                                        &mode->upward_share,
                                        NULL};
  return all[i];
}

static void put_index_header(sheet *s) {
  static const char *const first[] = {"polarization", "wavelength_nm", "order", NULL};
  static const char *const names[] = {"bloch_index",
                                      "group_index",
                                      "dispersion_ps_per_nm_km",
                                      "loss_db_per_cm",
                                      "loss_db_per_pitch",
                                      "absorption_db_per_cm",
                                      "radiation_db_per_cm",
                                      "radiation_per_mm",
                                      "upward_share",
                                      NULL};
  static const char *const last[] = {"regime", "estimate", "failed", "note", NULL};
  put_header(s, first);
  for (int i = 0; names[i]; i++) {
    char bar[COLUMN_NAME];
    snprintf(bar, sizeof bar, "%s_uncertainty", names[i]);
    put_text(s, names[i]);
    put_text(s, bar);
  }
  put_header(s, last);
  end_row(s);
}

/* One row; `mode` null for a point without modes. */
static void write_index_row(sheet *s, const picket_index_answer *answer,
                            const picket_index_point *point, const picket_bloch_mode *mode) {
  const picket_quantity none = {NAN, NAN, NULL};
  const picket_bloch_mode nothing = {0};
  bool known = mode && mode->regime != PICKET_REGIME_UNKNOWN;
  put_text(s, pk_word_polarization(answer->polarization));
  put_number(s, PK_NM_OF_UM * point->wavelength_um);
  put_number(s, mode ? mode->order : NAN);
  for (int i = 0; index_quantity(mode ? mode : &nothing, i); i++) {
    put_quantity(s, mode ? *index_quantity(mode, i) : none, 1);
  }
  put_text(s, known ? picket_regime_name(mode->regime) : NULL);
  put_number(s, point->estimate);
  put_flag(s, point->failed);
  put_text(s, point->note);
  end_row(s);
}

static void write_index(sheet *s, const picket_result *result) {
  put_index_header(s);
  for (int i = 0; i < result->count; i++) {
    const picket_index_answer *answer = &result->index[i];
    s->answer = i;
    for (int p = 0; p < answer->point_count; p++) {
      const picket_index_point *point = &answer->points[p];
      for (int m = 0; m < point->mode_count; m++) {
        write_index_row(s, answer, point, &point->modes[m]);
      }
      if (point->mode_count == 0) {
        write_index_row(s, answer, point, NULL);
      }
    }
  }
}

static void write_summary(sheet *s, const picket_result *result) {
  static const char *const header[] = {"name", "value", "unit", "text", NULL};
  put_header(s, header);
  end_row(s);
  for (int i = 0; i < result->count; i++) {
    const pk_summary_item *item = &result->summary[i];
    put_text(s, item->name);
    put_number(s, item->text ? NAN : item->value);
    put_text(s, item->unit);
    put_text(s, item->text);
    end_row(s);
  }
}

picket_status pk_csv_write(const picket_result *result, char **out) {
  static void (*const writers[])(sheet *, const picket_result *) = {
      [PK_RESULT_EDGES] = write_edges,
      [PK_RESULT_BANDS] = write_bands,
      [PK_RESULT_SLAB] = write_slab,
      [PK_RESULT_INDEX] = write_index,
      [PK_RESULT_MODES] = write_modes,
      [PK_RESULT_MATCH] = write_match,
      [PK_RESULT_SUMMARY] = write_summary,
      [PK_RESULT_AIM] = pk_csv_aim,
      [PK_RESULT_TAPER] = pk_csv_taper,
      [PK_RESULT_TOLERANCE] = pk_csv_tolerance,
      [PK_RESULT_EDGE_DERIVATIVES] = write_edge_derivatives,
      [PK_RESULT_INDEX_DERIVATIVES] = write_index_derivatives,
  };
  sheet s = {.context = result->context, .status = PICKET_OK, .fresh = true, .answer = -1};
  s.result = result->sweep_path ? result : NULL;
  writers[result->kind](&s, result);
  if (s.status != PICKET_OK) {
    pk_free(result->context, s.text);
    return s.status;
  }
  *out = s.text;
  return PICKET_OK;
}
