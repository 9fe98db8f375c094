/* A number with its error bar: what every question to the library is answered with. */
#ifndef PICKET_QUANTITY_H
#define PICKET_QUANTITY_H

#include <picket/export.h>

#ifdef __cplusplus
extern "C" {
#endif

/* value         NaN when the number could not be obtained
 * uncertainty   half-width of the error bar in the unit of the value: the true value of the
 *               two-dimensional ideal problem lies within value ± uncertainty. NaN when no bar can
 *               be vouched for
 * note          why value or uncertainty is missing, or null; borrowed from the result */
typedef struct picket_quantity {
  double value;
  double uncertainty;
  const char *note;
} picket_quantity;

#ifdef __cplusplus
}
#endif

#endif
