/* Inside of the writers of comma-separated values. */
#ifndef PK_IO_CSV_PRIVATE_H
#define PK_IO_CSV_PRIVATE_H

/* Columns of picket_mode_diameters, in its order, each with its bar. */
#define PK_CSV_DIAMETERS                                                                          \
  "petermann_um", "petermann_uncertainty_um", "petermann_x_um", "petermann_x_uncertainty_um",     \
      "petermann_y_um", "petermann_y_uncertainty_um", "rms_um", "rms_uncertainty_um", "rms_x_um", \
      "rms_x_uncertainty_um", "rms_y_um", "rms_y_uncertainty_um", "e2_x_um",                      \
      "e2_x_uncertainty_um", "e2_y_um", "e2_y_uncertainty_um", "gaussian_um",                     \
      "gaussian_uncertainty_um", "gaussian_overlap", "gaussian_overlap_uncertainty",              \
      "gaussian_x_um", "gaussian_x_uncertainty_um", "gaussian_y_um", "gaussian_y_uncertainty_um", \
      "gaussian_xy_overlap", "gaussian_xy_overlap_uncertainty"

#endif
