/* The lowest bands of a mirror of films, built in code without any file.
 *   cc c1_bands.c $(pkg-config --cflags --libs picket) && ./a.out */
#include <picket.h>
#include <stdio.h>

/* Paths and values are those of a problem file; lengths there are nm. */
static const char *const VALUES[][2] = {
    {"materials.nitride", "{constant: {index: 1.996}}"},
    {"materials.oxide", "{constant: {index: 1.444}}"},
    {"light", "{wavelength_nm: 1550, polarization: ey}"},
    {"cell", "{cladding: oxide, pitch_nm: 462.5, lateral: uniform}"},
    {"cell.shapes.0", "{stripe: {fill: nitride, across: z, from_nm: -97, to_nm: 97}}"},
};
enum { VALUE_COUNT = sizeof VALUES / sizeof VALUES[0] };

static void print(const picket_bands_answer *bands) {
  for (int i = 0; i < bands->point_count; i++) {
    const picket_band_point *point = &bands->points[i];
    printf("k = %.3f pi/pitch:", point->kz);
    for (int b = 0; b < bands->band_count; b++) {
      /* NaN where no mode is guided or a material is not known. */
      printf("  %.5f +- %.1e", point->frequency[b].value, point->frequency[b].uncertainty);
    }
    printf("\n");
  }
  for (int g = 0; g < bands->gap_count; g++) {
    printf("gap from %.5f to %.5f pitch/wavelength\n", bands->gaps[g].from.value,
           bands->gaps[g].to.value);
  }
}

int main(void) {
  picket_context *context = NULL;
  picket_problem *problem = NULL;
  picket_result *result = NULL;
  picket_bands_answer bands;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-3;
  options.count = 2;  /* bands */
  options.points = 4; /* wavenumbers from the centre of the zone to its edge */

  picket_status status = picket_context_create(NULL, &context);
  if (status == PICKET_OK) {
    status = picket_problem_create(context, &problem);
  }
  for (int i = 0; status == PICKET_OK && i < VALUE_COUNT; i++) {
    status = picket_problem_set(problem, VALUES[i][0], VALUES[i][1]);
  }
  if (status == PICKET_OK) {
    status = picket_bands_find(problem, &options, &result);
  }
  if (status == PICKET_OK) {
    status = picket_bands_get(result, 0, &bands);
  }
  if (status == PICKET_OK) {
    print(&bands);
  } else {
    fprintf(stderr, "%s: %s\n", picket_status_name(status), picket_context_message(context));
  }
  /* In any order; null is fine. */
  picket_context_free(context);
  picket_problem_free(problem);
  picket_result_free(result);
  return status == PICKET_OK ? 0 : 1;
}
