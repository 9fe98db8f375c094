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

/* Columns of a match. */
#define PK_CSV_MATCH                                                                           \
  "wavelength_nm", "mode", "mode_b", "index", "index_uncertainty", "index_b",                  \
      "index_b_uncertainty", "share", "share_uncertainty", "share_db", "share_uncertainty_db", \
      "offset_x_nm", "offset_x_uncertainty_nm", "offset_y_nm", "offset_y_uncertainty_nm",      \
      "best_share", "best_share_uncertainty", "best_share_db", "best_share_uncertainty_db",    \
      "best_offset_x_nm", "best_offset_x_uncertainty_nm", "best_offset_y_nm",                  \
      "best_offset_y_uncertainty_nm", "note"

#endif
