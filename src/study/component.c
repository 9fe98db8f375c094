/* Names and units of field components; see picket/field.h. */
#include <picket/field.h>
#include <stdbool.h>
#include <stddef.h>

static const char *const NAMES[] = {"Ex", "Ey", "Ez", "Hx", "Hy", "Hz"};

static bool is_component(picket_component which) {
  return (int)which >= PICKET_COMPONENT_EX && (int)which <= PICKET_COMPONENT_HZ;
}

const char *picket_component_name(picket_component which) {
  return is_component(which) ? NAMES[which] : NULL;
}

const char *picket_component_unit(picket_component which) {
  if (!is_component(which)) {
    return NULL;
  }
  return which <= PICKET_COMPONENT_EZ ? "V/m" : "A/m";
}
