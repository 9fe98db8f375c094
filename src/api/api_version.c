/* See picket/version.h; picket_version itself stands with the status codes. */
#include <picket.h>
#include <string.h>

/* Every struct of the public headers that is not opaque: a test holds the list against them. */
#define STRUCT(name) \
  { #name, sizeof(name) }
static const struct {
  const char *name;
  size_t size;
} STRUCTS[] = {
    STRUCT(picket_aim_answer),
    STRUCT(picket_aim_part),
    STRUCT(picket_band_point),
    STRUCT(picket_bands_answer),
    STRUCT(picket_bloch_mode),
    STRUCT(picket_confinement),
    STRUCT(picket_context_options),
    STRUCT(picket_coupling),
    STRUCT(picket_edge_comparison),
    STRUCT(picket_edge_derivative),
    STRUCT(picket_edge_derivatives),
    STRUCT(picket_edge_estimate),
    STRUCT(picket_edges_answer),
    STRUCT(picket_field_description),
    STRUCT(picket_figure_options),
    STRUCT(picket_gap),
    STRUCT(picket_index_answer),
    STRUCT(picket_index_derivative),
    STRUCT(picket_index_derivatives),
    STRUCT(picket_index_point),
    STRUCT(picket_match_answer),
    STRUCT(picket_match_point),
    STRUCT(picket_match_request),
    STRUCT(picket_mode_diameters),
    STRUCT(picket_modes_answer),
    STRUCT(picket_modes_point),
    STRUCT(picket_operating_band),
    STRUCT(picket_option_description),
    STRUCT(picket_options),
    STRUCT(picket_progress),
    STRUCT(picket_quantity),
    STRUCT(picket_radiated_order),
    STRUCT(picket_section_field_description),
    STRUCT(picket_section_mode),
    STRUCT(picket_slab_answer),
    STRUCT(picket_slab_mode),
    STRUCT(picket_slab_point),
    STRUCT(picket_stop_band),
    STRUCT(picket_sweep_request),
    STRUCT(picket_taper_answer),
    STRUCT(picket_taper_change),
    STRUCT(picket_taper_tooth),
    STRUCT(picket_tolerance_answer),
    STRUCT(picket_tolerance_check),
    STRUCT(picket_tolerance_corner),
    STRUCT(picket_tolerance_deviate),
    STRUCT(picket_tolerance_place),
    STRUCT(picket_tolerance_sensitivity),
    STRUCT(picket_tolerance_yield),
};
enum { COUNT = sizeof STRUCTS / sizeof STRUCTS[0] };

int picket_abi(void) {
  return PICKET_ABI;
}

#ifdef NDEBUG
#define ASSERTS "without asserts"
#else
#define ASSERTS "with asserts"
#endif
#ifdef __clang__
#define COMPILER "" /* says its name itself */
#else
#define COMPILER "gcc "
#endif

const char *picket_build(void) {
  return "picket " PICKET_VERSION ", compiled by " COMPILER __VERSION__ ", " ASSERTS;
}

const char *picket_struct_name(int i) {
  return i >= 0 && i < COUNT ? STRUCTS[i].name : NULL;
}

size_t picket_struct_size(const char *name) {
  for (int i = 0; name && i < COUNT; i++) {
    if (strcmp(name, STRUCTS[i].name) == 0) {
      return STRUCTS[i].size;
    }
  }
  return 0;
}
