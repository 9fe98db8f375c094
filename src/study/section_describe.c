/* See section_describe.h. */
#include "study/section_describe.h"

#include <assert.h>
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "section/forms.h"
#include "section/nodes.h"
#include "section/widths.h"
#include "study/section_bend.h"

/* dB/cm of a field that falls as exp(-x µm⁻¹): 20 log10(e) × 1e4. */
static const double DB_PER_CM = 86858.896380650366;

/* Nodes of the whole from those of a part: E_x is odd across a plane x = constant that is a
 * magnetic wall (tangential E even there, normal E odd), and across a plane y = constant that is an
 * electric one; E_y the other way round. */
static void count_nodes(const pk_section_family *f, const pk_section_fields *fields,
                        picket_section_mode *mode) {
  int nodes[2];
  bool along_x = mode->ex_share > 0.5;
  pk_section_nodes(fields, along_x, nodes);
  for (int axis = 0; axis < 2; axis++) {
    if (f->survey->mirror[axis]) {
      bool normal = along_x == (axis == 0);
      bool odd = (f->plane[axis] == PK_END_FREE) == normal;
      nodes[axis] = 2 * nodes[axis] + (odd ? 1 : 0);
    }
  }
  mode->nodes_x = nodes[0];
  mode->nodes_y = nodes[1];
}

static picket_status take_confinement(const pk_section_survey *s, pk_section *section,
                                      const pk_section_fields *fields, picket_section_mode *mode) {
  const pk_problem *problem = s->problem;
  picket_context *context = problem->context;
  double *share = PK_NEW(context, s->media, double);
  picket_confinement *list = PK_NEW(context, s->media, picket_confinement);
  picket_status status =
      share && list ? pk_section_confinement(section, fields, share) : PICKET_ERROR_MEMORY;
  int count = 0;
  for (int m = 0; status == PICKET_OK && m < s->media; m++) {
    if (pk_section_uses(section, m)) {
      list[count++] = (picket_confinement){pk_materials_name(problem->materials, m), share[m]};
    }
  }
  pk_free(context, share);
  if (status != PICKET_OK) {
    pk_free(context, list);
    return status;
  }
  pk_free(context, (void *)mode->confinement);
  mode->confinement = list;
  mode->material_count = count;
  return PICKET_OK;
}

static picket_status take_diameters(const pk_section_survey *s, const pk_section *section,
                                    const pk_section_fields *fields, double *numbers) {
  pk_section_whole whole = {0};
  pk_section_widths w = {0};
  double kinks[2];
  int parts = (s->mirror[0] ? 2 : 1) * (s->mirror[1] ? 2 : 1);
  pk_section_kinks(section, s->k0, fields, kinks);
  kinks[0] *= parts;
  kinks[1] *= parts;
  picket_status status = pk_section_unfold(section, fields, s->mirror, &whole);
  if (status == PICKET_OK) {
    status = pk_section_widths_take(&whole, kinks, &w);
  }
  if (status == PICKET_OK) {
    const double all[PK_DIAMETERS] = {
        w.petermann,     w.petermann_along[0], w.petermann_along[1], w.rms,  w.rms_along[0],
        w.rms_along[1],  w.fall_along[0],      w.fall_along[1],      w.beam, w.beam_overlap,
        w.oval_along[0], w.oval_along[1],      w.oval_overlap};
    memcpy(numbers, all, sizeof all);
  }
  pk_section_whole_clear(&whole);
  return status;
}

picket_status pk_section_describe(const pk_section_family *f, pk_section *section,
                                  const pk_section_mode *solved, double *numbers,
                                  picket_section_mode *mode) {
  const pk_section_survey *s = f->survey;
  pk_section_fields fields = {0};
  double complex group = NAN;
  picket_status status = pk_section_fields_take(section, s->k0, solved, &fields);
  if (status == PICKET_OK) {
    status = pk_section_group_index(section, &fields, s->dispersive ? s->slope : NULL, &group);
  }
  if (status == PICKET_OK) {
    pk_section_looks looks;
    pk_section_look(section, &fields, &looks);
    int parts = (s->mirror[0] ? 2 : 1) * (s->mirror[1] ? 2 : 1);
    numbers[PK_NUMBER_INDEX] = creal(solved->beta) / s->k0;
    numbers[PK_NUMBER_GROUP] = creal(group);
    numbers[PK_NUMBER_LOSS] = DB_PER_CM * pk_section_bend_loss(f, section, solved, &fields);
    numbers[PK_NUMBER_AREA] = parts * looks.effective_area;
    status = take_diameters(s, section, &fields, numbers + PK_NUMBER_DIAMETERS);
    if (status == PICKET_OK && mode) {
      mode->ex_share = looks.ex_share;
      count_nodes(f, &fields, mode);
      status = take_confinement(s, section, &fields, mode);
    }
  }
  pk_section_fields_clear(&fields);
  return status;
}

picket_quantity *pk_section_quantity(picket_section_mode *mode, int number) {
  static_assert(sizeof(picket_mode_diameters) == PK_DIAMETERS * sizeof(picket_quantity),
                "a mode-field diameter lacks its number");
  switch (number) {
    case PK_NUMBER_INDEX: return &mode->index;
    case PK_NUMBER_GROUP: return &mode->group_index;
    case PK_NUMBER_LOSS: return &mode->loss_db_per_cm;
    case PK_NUMBER_AREA: return &mode->effective_area_um2;
    default: return (picket_quantity *)&mode->diameters + (number - PK_NUMBER_DIAMETERS);
  }
}

/* Places in picket_mode_diameters. */
enum { RMS = 3, FALL = 6, BEAM = 8 };

pk_error_law pk_section_number_law(const pk_error_law *law, int number) {
  pk_error_law own = *law;
  int place = number - PK_NUMBER_DIAMETERS;
  if (place >= FALL && place < BEAM) {
    /* Read off between grid places, which lie differently on every grid. */
    own.smooth = own.corners = 0;
  }
  return own;
}

/* Slopes of h_t are not smooth at corners, in a way that is in no law: of a wire 450 nm by 220 nm
 * two of six bars were too small, the worst by 1.6. */
static const double SLOPES_CAUTION = 3;

/* Places where a field falls to a level scatter little, by chance, on some families of grids: of
 * four bars of a fibre one was too small by 5 %. */
static const double FALL_CAUTION = 2;

double pk_section_number_caution(int number) {
  int place = number - PK_NUMBER_DIAMETERS;
  if (place >= FALL && place < BEAM) {
    return FALL_CAUTION;
  }
  return place >= 0 && place < RMS ? SLOPES_CAUTION : 1;
}

const char *pk_section_number_note(int number) {
  int place = number - PK_NUMBER_DIAMETERS;
  if (place >= BEAM) {
    return "no Gaussian beam about the centroid of the mode's power resembles it";
  }
  return place >= FALL ? "on the line through the centroid of the mode's power there is too little "
                         "of it, or it does not fall to 1/e2 within the window"
                       : NULL;
}
