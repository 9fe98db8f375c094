/* What files of mode fields say about themselves (hdf5.c). */
#ifndef PK_IO_FIELD_TEXT_H
#define PK_IO_FIELD_TEXT_H

static const char PK_FIELD_WHAT[] =
    "Fields of Bloch modes over one pitch of a segmented guide. Groups: polarization / vacuum "
    "wavelength / mode. Datasets are [z][x] on the lines z_um, x_um and hold the periodic part.";
static const char PK_FIELD_CONVENTIONS[] =
    "Field at (z, x) = dataset * exp(i k_per_um z), z and x in micrometres, times exp(-i omega t). "
    "z runs along the guide, x across, y out of the drawing; (z, x, y) are right-handed. The last "
    "line along z repeats the first one of the next pitch. Lines outside reliable_x_um lie in "
    "absorbing layers. E in V/m, H in A/m; permittivity is relative, the mean over the cell around "
    "each node. On an interface the component of E normal to it is the mean of both sides.";

static const char PK_SECTION_WHAT[] =
    "Fields of the modes of a section. Groups: section / vacuum wavelength / mode. Datasets are "
    "[x][y] on the staggered grid of the solver: the attribute axes names the places of each.";
static const char PK_SECTION_CONVENTIONS[] =
    "Field at (x, y, z) = dataset * exp(i k_per_um z), lengths in micrometres, times exp(-i omega "
    "t). x runs across, y up, z along the guide; (x, y, z) are right-handed. Interfaces lie on "
    "lines, and every component of E is tangential to those that it lies on. Places outside "
    "reliable_x_um and reliable_y_um lie in absorbing layers. E in V/m, H in A/m; permittivities "
    "are relative, as the scheme has them for each component of E: averaged across interfaces, "
    "corrected at corners. The parts on the other side of mirror planes are there too.";

static const char PK_UNIT_POWER[] =
    "1 W per metre of height (y) towards +z: half the real part of the integral of (E x H*)_z over "
    "reliable_x_um, averaged over a pitch";
static const char PK_UNIT_DENSITY[] =
    "1 W per square metre towards +z: half the real part of (E x H*)_z, averaged over a pitch";
static const char PK_UNIT_PEAK[] =
    "the wave does not propagate: the largest stored magnitude of the components, in V/m and A/m, "
    "is 1";
static const char PK_UNIT_WATT[] =
    "1 W towards +z: half the real part of the integral of (E x H*)_z over reliable_x_um and "
    "reliable_y_um";

#endif
