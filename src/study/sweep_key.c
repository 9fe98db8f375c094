/* See sweep_key.h. */
#include "study/sweep_key.h"

#include <complex.h>
#include <math.h>

#include "base/hash.h"

/* Of a material with a known range, both ends among them: a table has some hundred lines, and one
 * that was edited is to be told even where no wavelength is given. */
enum { PLACES = 65 };

static uint64_t medium_at(uint64_t key, const pk_problem *problem, int material,
                          double wavelength_um) {
  pk_medium medium = {0};
  if (pk_materials_at(problem->materials, material, wavelength_um, problem->temperature_c,
                      &medium) != PICKET_OK) {
    medium = (pk_medium){0};
  }
  key = pk_hash_number(key, creal(medium.permittivity));
  return pk_hash_number(key, cimag(medium.permittivity));
}

uint64_t pk_sweep_key_of_media(uint64_t key, const pk_problem *problem) {
  for (int m = 0; m < pk_materials_count(problem->materials); m++) {
    for (int i = 0; i < problem->light.count; i++) {
      key = medium_at(key, problem, m, problem->light.wavelength_um[i]);
    }
  }
  pk_message_clear(problem->context);
  return key;
}

static uint64_t over_ranges(uint64_t key, const pk_problem *problem) {
  for (int m = 0; m < pk_materials_count(problem->materials); m++) {
    pk_material_range range = pk_materials_range(problem->materials, m);
    double width = range.longest_um - range.shortest_um;
    for (int i = 0; isfinite(width) && i < PLACES; i++) {
      key = medium_at(key, problem, m, range.shortest_um + width * i / (PLACES - 1));
    }
  }
  pk_message_clear(problem->context);
  return key;
}

uint64_t pk_sweep_key_of_run(const pk_sweep_kind *kind, const pk_sweep_source *source,
                             const picket_options *options) {
  uint64_t key = pk_hash_bytes(PK_HASH_START, &source->document, sizeof source->document);
  key = pk_hash_number(key, kind->result);
  key = pk_hash_text(key, source->path ? source->path : "");
  key = pk_hash_number(key, options->accuracy);
  key = pk_hash_number(key, options->count);
  key = pk_hash_number(key, options->unknowns);
  return over_ranges(key, source->problem);
}
