/* Visibility of the public names: everything else in the library is hidden. */
#ifndef PICKET_EXPORT_H
#define PICKET_EXPORT_H

#if defined(__GNUC__)
#define PICKET_EXPORT __attribute__((visibility("default")))
#else
#define PICKET_EXPORT
#endif

#endif
