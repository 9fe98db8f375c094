"""What the library answers with. Each class mirrors a struct of the C headers, member by member.

Lengths are in µm (the suffix says so), k in units of π/pitch, angles in radians. A number that could not be
obtained is NaN. Arrays are tuples of records; `Result.columns` makes NumPy arrays of them.
"""

import ctypes
import enum
import math
from typing import Optional, Tuple

import numpy as np

from ._layout import many, record, stored


class _Word(enum.IntEnum):
    """An enumeration whose members have a word: that of problem files and documents."""

    @property
    def word(self):
        return self.name.lower().replace('_', '-')

    @classmethod
    def of(cls, value):
        """The member for a member, its number or its word."""
        for member in cls:
            if value == member or value == member.word:
                return member
        words = ', '.join(repr(member.word) for member in cls)
        raise ValueError(f'{cls.__name__.lower()} is {value!r}, must be one of {words}')


class Polarization(_Word):
    """Of a cell, by the field normal to the drawing; of a channel, by the larger transverse electric component, in
    y (tm-like) or in x (te-like)."""
    EY = 0
    HY = 1
    TM_LIKE = 2
    TE_LIKE = 3


class SlabPolarization(_Word):
    """Of a slab: te has E along the films."""
    TE = 0
    TM = 1


class Regime(_Word):
    """How a segmented guide works at a wavelength."""
    UNKNOWN = 0
    SUBWAVELENGTH = 1
    STOP_BAND = 2
    RADIATING = 3


class Side(_Word):
    """The lateral sides of a cell: towards -x and towards +x."""
    LOW = 0
    HIGH = 1


class LogLevel(_Word):
    """How much is said through the log."""
    WARNING = 0
    INFO = 1
    DETAIL = 2


class Verdict(enum.IntEnum):
    """The answer of a progress callable; None is CONTINUE, too."""
    CONTINUE = 0
    STOP = 1


class Question(_Word):
    """What a sweep asks at each value."""
    EDGES = 0
    INDEX = 1
    MODES = 2
    SLAB = 3


class Component(enum.IntEnum):
    """Components of a field, E in V/m and H in A/m."""
    EX = 0
    EY = 1
    EZ = 2
    HX = 3
    HY = 4
    HZ = 5


@record('picket_quantity')
class Quantity:
    """A number with its error bar; float() gives the value, str() both."""
    value: float
    """NaN when the number could not be obtained"""
    uncertainty: float
    """half-width of the error bar in the unit of the value; NaN when no bar can be vouched for"""
    note: Optional[str]
    """why value or uncertainty is missing, or None"""

    def __float__(self):
        return self.value

    def __str__(self):
        if not self.uncertainty > 0 or math.isinf(self.uncertainty):
            bar = 'unknown' if math.isnan(self.uncertainty) else f'{self.uncertainty:g}'
            return f'{self.value:.10g} ± {bar}'
        places = 1 - math.floor(math.log10(self.uncertainty))
        if not 0 <= places <= 12:
            return f'{self.value:.6g} ± {self.uncertainty:.2g}'
        return f'{self.value:.{places}f} ± {self.uncertainty:.{places}f}'


# --- edges.h

@record('picket_stop_band')
class StopBand:
    """One stop band of the fundamental guided mode's own family; vacuum wavelengths."""
    order: int
    """m: the band opens at k = mπ/pitch"""
    short_um: Quantity
    """short-wavelength edge, µm"""
    long_um: Quantity
    """long-wavelength edge, µm"""
    short_confined: bool
    """the edge is below the light line of every open side"""
    long_confined: bool
    attenuation_db_per_pitch: Quantity
    """the largest inside"""


@record('picket_operating_band')
class OperatingBand:
    """The operating band (`light` of the problem) against the first stop band."""
    given: bool
    from_um: float
    to_um: float
    regime: Regime
    """the worst over the band"""
    clearance_um: Quantity
    """from_um minus the long edge of order 1, µm; negative: reaches into it"""


@record('picket_edge_estimate')
class EdgeEstimate:
    """Second-order Rytov homogenisation of the core, the slab of that core, and the Bragg condition."""
    method: Optional[str]
    """None if the estimate does not apply"""
    centre_um: float
    """estimated centre of the first stop band, µm; NaN if there is none"""
    error_um: Quantity
    """estimate minus the centre found, µm"""


@record('picket_edges_answer')
class EdgesAnswer:
    """The stop bands of one polarization."""
    polarization: Polarization
    bands: Tuple[StopBand, ...] = many('band_count', rows=True)
    operating: OperatingBand
    estimate: EdgeEstimate
    note: Optional[str]
    """why the answer could not be computed, in a sweep; None otherwise"""
    failed: bool = stored(ctypes.c_int)
    """True if it could not: there are no bands then"""


# --- bands.h

@record('picket_band_point')
class BandPoint:
    """The frequencies at one wavenumber."""
    kz: float
    """in π/pitch"""
    kx: float
    """in π/lateral span"""
    label: Optional[str]
    """of the path point, or None"""
    frequency: Tuple[Quantity, ...] = many('band_count', rows=True, above=True, number='band')
    """[band_count] pitch/λ, rising; NaN: not guided, or a material is unknown there"""


@record('picket_gap')
class Gap:
    """A range of frequencies without a mode at any point of the path."""
    below: int
    """number of bands below the gap"""
    start: Quantity = stored(name='from')
    """pitch/λ, top of band `below`"""
    to: Quantity
    """pitch/λ, bottom of the next band"""


@record('picket_bands_answer')
class BandsAnswer:
    """The bands of one polarization along a path."""
    polarization: Polarization
    band_count: int
    points: Tuple[BandPoint, ...] = many('point_count', rows=True)
    gaps: Tuple[Gap, ...] = many('gap_count')

    @property
    def wavenumbers(self):
        """[point_count, 2]: k_z in π/pitch and k_x in π/lateral span."""
        return np.array([(p.kz, p.kx) for p in self.points]).reshape(-1, 2)

    @property
    def frequencies(self):
        """[point_count, band_count]: pitch/λ."""
        return self._table('value')

    @property
    def uncertainties(self):
        """[point_count, band_count]: of the frequencies."""
        return self._table('uncertainty')

    def _table(self, which):
        return np.array([[getattr(q, which) for q in p.frequency] for p in self.points]).reshape(-1, self.band_count)


# --- index.h

@record('picket_radiated_order')
class RadiatedOrder:
    """A plane wave that a Bloch mode sends into an open side."""
    order: int
    """m: its wavenumber along z is k + 2πm/pitch"""
    side: Side
    angle_rad: float
    """from the lateral direction towards +z, -π/2 to π/2"""
    share: float
    """of all radiated power, 0 to 1"""


@record('picket_bloch_mode')
class BlochMode:
    """One Bloch mode, forward: its power flows or decays along +z."""
    order: int
    """lateral nodes of the field: 0 is the fundamental mode"""
    bloch_index: Quantity
    """Re k/k0, unfolded; inside a stop band mπ/(pitch k0)"""
    group_index: Quantity
    """material dispersion included; NaN inside a stop band"""
    dispersion_ps_per_nm_km: Quantity
    loss_db_per_cm: Quantity
    """of power, from Im k; inside a stop band the attenuation"""
    loss_db_per_pitch: Quantity
    absorption_db_per_cm: Quantity
    """the part of the loss that heats the media"""
    radiation_db_per_cm: Quantity
    """the part that leaves through open sides"""
    radiation_per_mm: Quantity
    """the same as a power coefficient, 1/mm"""
    upward_share: Quantity
    """of the radiated power, into the side of +x; NaN if none"""
    regime: Regime
    radiated: Tuple[RadiatedOrder, ...] = many('radiated_count')


@record('picket_index_point')
class IndexPoint:
    """The modes at one wavelength."""
    wavelength_um: float
    modes: Tuple[BlochMode, ...] = many('mode_count', rows=True)
    """by rising order"""
    estimate: float
    """index of the homogenised guide (second-order Rytov); NaN if none"""
    note: Optional[str]
    """why there is no mode, or why the point failed; None otherwise"""
    failed: bool = stored(ctypes.c_int)
    """True if the point could not be computed"""


@record('picket_index_answer')
class IndexAnswer:
    """The sweep of one polarization."""
    polarization: Polarization
    points: Tuple[IndexPoint, ...] = many('point_count', rows=True)


# --- slab.h

@record('picket_slab_mode')
class SlabMode:
    """A guided mode of a film stack."""
    order: int
    """number of zeros of the field"""
    index: Quantity
    group_index: Quantity
    """with material dispersion"""


@record('picket_slab_point')
class SlabPoint:
    """The modes at one wavelength."""
    wavelength_um: float
    modes: Tuple[SlabMode, ...] = many('mode_count', rows=True)
    """by falling index"""


@record('picket_slab_answer')
class SlabAnswer:
    """The modes of one polarization."""
    polarization: SlabPolarization
    points: Tuple[SlabPoint, ...] = many('point_count', rows=True)
    note: Optional[str]
    """why the answer could not be computed, in a sweep; None otherwise"""
    failed: bool = stored(ctypes.c_int)
    """True if it could not: there are no points then"""


# --- modes.h

@record('picket_confinement')
class Confinement:
    """Share of the electric energy of a mode that is in a material."""
    material: Optional[str]
    share: float
    """0 to 1; the shares of a mode add up to 1"""


@record('picket_mode_diameters')
class ModeDiameters:
    """Mode-field diameters, µm, each by its own definition; NaN with a note where a mode has none. All are 2w for a
    Gaussian beam with an intensity as exp(-2r²/w²)."""
    petermann_um: Quantity
    """Petermann II: from the spread of the far field; then along x and along y"""
    petermann_x_um: Quantity
    petermann_y_um: Quantity
    rms_um: Quantity
    """2√2 √⟨r²⟩ about the centroid of the power flow; then along x and along y: 4σ"""
    rms_x_um: Quantity
    rms_y_um: Quantity
    e2_x_um: Quantity
    """where the power flow falls to 1/e² of its largest value, on the line through its centroid"""
    e2_y_um: Quantity
    gaussian_um: Quantity
    """of the round Gaussian beam that resembles the mode most"""
    gaussian_overlap: Quantity
    """how much it does, 0 to 1"""
    gaussian_x_um: Quantity
    """of the beam with a diameter along x and one along y"""
    gaussian_y_um: Quantity
    gaussian_xy_overlap: Quantity


@record('picket_section_mode')
class SectionMode:
    """A full-vector mode of a section."""
    order: int
    """by falling index, from 0"""
    index: Quantity
    """Re β/k0"""
    group_index: Quantity
    """dβ/dk0, material dispersion included"""
    loss_db_per_cm: Quantity
    """of power: absorption and leakage"""
    bend_loss_db_per_90_deg: Quantity
    """loss_db_per_cm over a quarter turn of a bend; NaN without a note where it is straight"""
    effective_area_um2: Quantity
    """(∫S_z dA)² / ∫S_z² dA, µm²"""
    diameters: ModeDiameters
    ex_share: float
    """of the transverse electric energy, that along x: 1 te-like, 0 tm-like"""
    nodes_x: int
    nodes_y: int
    """zeros of the stronger of E_x and E_y along x and y"""
    confinement: Tuple[Confinement, ...] = many('material_count')


@record('picket_modes_point')
class ModesPoint:
    """The modes at one wavelength."""
    wavelength_um: float
    modes: Tuple[SectionMode, ...] = many('mode_count', rows=True)
    """by falling index"""
    note: Optional[str]
    """why there is no mode, or why the point failed; None otherwise"""
    failed: bool = stored(ctypes.c_int)
    """True if the point could not be computed"""


@record('picket_modes_answer')
class ModesAnswer:
    """The modes of a section at each wavelength."""
    points: Tuple[ModesPoint, ...] = many('point_count', rows=True)


# --- derivative.h

@record('picket_edge_derivative')
class EdgeDerivative:
    """Derivatives of the edges of one stop band, µm per unit of the varied value."""
    order: int
    short_um: Quantity
    long_um: Quantity


@record('picket_edge_derivatives')
class EdgeDerivatives:
    """Of one polarization."""
    polarization: Polarization
    bands: Tuple[EdgeDerivative, ...] = many('band_count', rows=True)


@record('picket_index_derivative')
class IndexDerivative:
    """Derivative of the fundamental mode's Bloch index, per unit of the varied value."""
    wavelength_um: float
    bloch_index: Quantity


@record('picket_index_derivatives')
class IndexDerivatives:
    """Of one polarization."""
    polarization: Polarization
    points: Tuple[IndexDerivative, ...] = many('point_count', rows=True)


# --- aim.h

class DerivativeWay(_Word):
    """How a derivative was found."""
    NONE = 0
    ANALYTIC = 1
    DIFFERENCE = 2
    SAMPLES = 3


@record('picket_aim_part')
class AimPart:
    """One varied number and its target; the number is in the unit of the problem file."""
    vary: str
    """dotted path"""
    start: float = stored(name='from')
    """its lower bound"""
    to: float
    """its upper bound"""
    quantity: str
    unit: str
    """of the quantity; '' for a pure number"""
    target: float
    at_um: float
    """for a quantity at one wavelength, else NaN"""
    value: Quantity
    """of the number; NaN with a note if there is no solution between the bounds"""
    achieved: Quantity
    """the quantity by a direct solve at `value`"""
    derivative: Quantity
    """of the quantity per unit of the number, at `value`"""
    derivative_way: DerivativeWay
    at_from: Quantity
    """the quantity at the bounds, with one target; may be coarse"""
    at_to: Quantity
    snapped: float
    """value on the mask grid; NaN without a grid or for no length"""
    snapped_achieved: Quantity
    """the quantity there, by a direct solve"""


@record('picket_aim_answer')
class AimAnswer:
    """What was found for one polarization."""
    polarization: str
    """'ey', 'hy', 'te-like' or 'tm-like'"""
    parts: Tuple[AimPart, ...] = many('part_count', rows=True)
    """1 or 2"""
    found: bool = stored(ctypes.c_int)
    """True if the targets are met between the bounds"""
    reason: Optional[str]
    """why not; None if found"""
    solves: int
    """direct solves of a quantity, those on the mask grid included"""
    derivative_passes: int
    """passes over the grids for analytic derivatives"""
    unique: int
    """1: monotone over what was sampled; 0: the target is met more than once; -1: not shown either way"""
    unique_basis: Optional[str]
    """how that was judged"""
    smallest_feature_um: float
    """of the structure at `value`; NaN if there is none"""
    respects_rules: int
    """1 or 0 against rules.smallest_feature_nm; -1 without one"""
    snapped: bool = stored(ctypes.c_int)
    """True if there is a mask grid and a length to put on it"""
    snapped_smallest_feature_um: float
    snapped_respects_rules: int
    """as above, on the mask grid"""


# --- tolerance.h

@record('picket_tolerance_sensitivity')
class ToleranceSensitivity:
    """One number that spreads, in the unit of the problem file, and what the quantity makes of it."""
    vary: str
    """dotted path"""
    group: Optional[str]
    """None: it varies by itself"""
    unit: str
    """of the number: 'nm', 'um', 'K', 'deg' or ''"""
    nominal: float
    sigma: float
    """of a normal spread, else NaN"""
    start: float = stored(name='from')
    """of a uniform spread, else NaN"""
    to: float
    per_unit: Quantity
    """change of the quantity per unit of this number alone"""
    per_unit_way: DerivativeWay
    second_per_unit2: Quantity
    """second derivative"""


@record('picket_tolerance_deviate')
class ToleranceDeviate:
    """What is drawn once for a sample; derivatives of the surrogate per standard deviation, or half a range."""
    name: str
    """of the group, or the path of the number"""
    normal: bool = stored(ctypes.c_int)
    first: float
    second: float


@record('picket_tolerance_place')
class TolerancePlace:
    """A number at a corner."""
    vary: str
    value: float


@record('picket_tolerance_corner')
class ToleranceCorner:
    """All spreads at an end at once."""
    places: Tuple[TolerancePlace, ...] = many('place_count')
    value: Quantity
    direct: bool = stored(ctypes.c_int)
    """by a direct solve; else by the surrogate, its error in the bar"""


@record('picket_tolerance_check')
class ToleranceCheck:
    """A direct solve that the surrogate was held against."""
    direct: Quantity
    surrogate: float
    near_limit: bool = stored(ctypes.c_int)
    """chosen where the surrogate meets the limit; else at random"""


@record('picket_tolerance_yield')
class ToleranceYield:
    """How the samples were judged."""
    value: Quantity
    """share that meets the requirement; the bar reaches to the farther end of the 95 % interval, and by the share of
    the undecided samples beyond"""
    low: float
    """95 % interval of the count (Wilson)"""
    high: float
    samples: int
    seed: int
    by_surrogate: int
    direct: int
    estimated: int
    """too near to the limit for the surrogate, but more than may be solved"""
    undecided: int
    """nearer to the limit than the bar of the quantity"""
    without_value: int
    """counted as not met"""


@record('picket_tolerance_answer')
class ToleranceAnswer:
    """What the process does to a quantity, for one polarization."""
    polarization: str
    """'ey', 'hy', 'te-like' or 'tm-like'"""
    quantity: str
    unit: str
    at_um: float
    at_least: float
    """NaN where nothing is required"""
    at_most: float
    nominal: Quantity
    nominal_meets: int
    """1 or 0; -1 if it is not known within its bar"""
    sensitivities: Tuple[ToleranceSensitivity, ...] = many('sensitivity_count', rows=True)
    deviates: Tuple[ToleranceDeviate, ...] = many('deviate_count')
    corners: Tuple[ToleranceCorner, ...] = many('corner_count')
    corner_convention: str
    worst: int
    """number of the worst corner; -1 if a corner has no value"""
    worst_value: Quantity
    checks: Tuple[ToleranceCheck, ...] = many('check_count')
    surrogate_error: float
    """largest at the checks; NaN without a surrogate"""
    surrogate_note: Optional[str]
    """why there is none, or None"""
    yielded: ToleranceYield = stored(name='yield')
    solves: int


# --- taper.h

class TaperLaw(_Word):
    """How a number goes from its first value (t = 0) to its last (t = 1)."""
    LINEAR = 0
    POWER = 1
    COSINE = 2


class TaperWarning(_Word):
    """What may be wrong with a tooth; bits of its `warnings`."""
    STOP_BAND = 1
    PAST_BAND = 2
    RADIATING = 4
    SMALL_FEATURE = 8
    ABRUPT = 16


@record('picket_taper_change')
class TaperChange:
    """One number of the problem that changes along the row, in the unit of the problem file."""
    vary: str
    """dotted path"""
    start: float = stored(name='from')
    to: float
    law: TaperLaw
    exponent: float
    """of the power law"""


@record('picket_taper_tooth')
class TaperTooth:
    """One cell of the row as if it went on for ever."""
    number: int
    """from 1"""
    at_um: float
    """its middle, from the beginning of the row"""
    pitch_um: float
    values: Tuple[float, ...] = many('value_count')
    """of the numbers that change, in their order"""
    bloch_index: Quantity
    group_index: Quantity
    loss_db_per_cm: Quantity
    clearance_um: Quantity
    """the wavelength minus the long edge of the first stop band"""
    regime: Regime
    mode_size_um: Quantity
    """4 sigma of the power flow across the guide"""
    overlap_next: Quantity
    """of its mode with that of the next cell: 1 for equal shapes of the transverse H"""
    reflection_next: Quantity
    """share that its own mode takes back, were there only the two modes"""
    fibre_share: Quantity
    """share that the mode has in common with the fibre's beam"""
    next_index: float
    """of what the mode couples to first: the next mode of its symmetry, or the denser open side"""
    adiabatic: float
    """how fast the mode changes its size, as a part of what the length-scale criterion allows"""
    smallest_feature_um: float
    warnings: int
    """sum of TaperWarning"""
    note: Optional[str]
    """why the tooth has no numbers"""
    failed: bool = stored(ctypes.c_int)

    @property
    def warned(self):
        """The words of its warnings."""
        return tuple(warning.word for warning in TaperWarning if warning & self.warnings)


@record('picket_taper_answer')
class TaperAnswer:
    """A row in one polarization."""
    polarization: Polarization
    wavelength_um: float
    fibre_um: float
    """mode-field diameter of the fibre; NaN without one"""
    length_um: float
    changes: Tuple[TaperChange, ...] = many('change_count')
    teeth: Tuple[TaperTooth, ...] = many('tooth_count', rows=True)
    transmission: Quantity
    """the product of all overlaps"""
    fibre_share: Quantity
    """of the last tooth"""


# --- match.h

class MatchAlong(_Word):
    """Of the E of a linearly polarized beam; best: whichever couples more."""
    BEST = 0
    ALONG_X = 1
    ALONG_Y = 2

    @property
    def word(self):
        return self.name.lower().replace('along_', '')


@record('picket_match_request')
class MatchRequest:
    """What was asked of a match."""
    size: int = stored(ctypes.c_size_t)
    mode: int
    """order of the mode of the first section, by falling index from 0"""
    mode_b: int
    """of the second section; -1: the one of its first two that couples more"""
    gaussian_x_um: float
    """mode-field diameters of the beam, 1/e² of the intensity; both 0: a second section"""
    gaussian_y_um: float
    along: MatchAlong
    medium_index: float
    """of the medium the beam comes from, for its tilt; 0: that of the cladding"""
    offset_given: bool = stored(ctypes.c_int)
    offset_x_um: float
    """the other side against the first"""
    offset_y_um: float
    tilt_x_rad: float
    """the other side leans towards +x, +y"""
    tilt_y_rad: float


@record('picket_coupling')
class Coupling:
    """A share of the power, and the same as 10 log10, at an offset."""
    share: Quantity
    """0 to 1"""
    share_db: Quantity
    """0 or less; missing where nothing is coupled"""
    offset_x_um: Quantity
    offset_y_um: Quantity


@record('picket_match_point')
class MatchPoint:
    """The coupling at one wavelength."""
    wavelength_um: float
    coupling: Coupling
    """at the offset given, or none"""
    best: Coupling
    """at the best offset; missing if one was given"""
    index: Quantity
    """of the first section's mode"""
    index_b: Quantity
    """of the second's; missing for a beam"""
    mode_b: int
    """the one taken; -1 for a beam"""
    along: MatchAlong
    """of the beam taken; BEST for a section"""
    note: Optional[str]
    """why the point has no numbers; None otherwise"""


@record('picket_match_answer')
class MatchAnswer:
    """What two guides, or a guide and a beam, pass on at each wavelength."""
    request: MatchRequest
    other: Optional[str] = stored(name='with')
    """name of the second problem; None for a beam"""
    points: Tuple[MatchPoint, ...] = many('point_count', rows=True)


# --- field.h

@record('picket_field_description')
class FieldDescription:
    """What a field is of."""
    polarization: Polarization
    order: int
    """lateral nodes at this wavelength: 0 is the fundamental mode"""
    wavelength_um: float
    """in vacuum"""
    pitch_um: float
    index_re: float
    """the Bloch index k/k0 on this grid"""
    index_im: float
    propagates: bool
    """False: scaled to a largest value of 1 instead of unit power"""
    x_from_um: float
    x_to_um: float
    """lines outside lie in absorbing layers, where the field is not that of the cell"""


# --- section_field.h

@record('picket_section_field_description')
class SectionFieldDescription:
    """What a section's field is of."""
    order: int
    """by falling index on this grid, from 0"""
    wavelength_um: float
    """in vacuum"""
    index_re: float
    """β/k0 on this grid; for one with a bar, ask for the modes"""
    index_im: float
    x_from_um: float
    x_to_um: float
    y_from_um: float
    y_to_um: float
    """outside of these lie absorbing layers, where the field is not that of the section"""
