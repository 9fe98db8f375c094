/* Mode fields as HDF5 files: their layouts are in picket/field.h and picket/section_field.h. */
#ifndef PK_IO_FIELD_FILE_H
#define PK_IO_FIELD_FILE_H

#include "study/fields.h"
#include "study/section_field.h"

typedef struct pk_field_file pk_field_file;

/* Starts a file that will get its name when it is whole: it is written beside it until then, and a
 * path that cannot be written shows at once. A link is followed.
 *   name     of the problem, kept in the file
 *   section  the fields are of a section, not of a cell
 * PICKET_ERROR_OUTPUT. */
picket_status pk_field_file_open(picket_context *context, const char *path, const char *name,
                                 bool section, pk_field_file **out);

/* Adds a field, or why there is none. PICKET_ERROR_OUTPUT. */
picket_status pk_field_file_add(pk_field_file *file, const picket_field *field);
picket_status pk_field_file_miss(pk_field_file *file, pk_polarization polarization,
                                 double wavelength_um, const char *why);

picket_status pk_field_file_add_section(pk_field_file *file, const picket_section_field *field);
picket_status pk_field_file_miss_section(pk_field_file *file, double wavelength_um,
                                         const char *why);

/* Finishes the file and gives it its name. The file is gone after that, also when this fails. */
picket_status pk_field_file_finish(pk_field_file *file);

/* Throws away a file that is not finished; accepts null. */
void pk_field_file_drop(pk_field_file *file);

#endif
