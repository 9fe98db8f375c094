"""The shared library: where it lies, its functions, and whether it is the one this binding was written for.

A new call of the C API is a row of FUNCTIONS; a new study is a row of STUDIES (its records stand in records.py and
its method in problem.py).
"""

import ctypes
import ctypes.util
import os
import pathlib

from . import records
from ._layout import RECORDS, text
from ._version import __version__

NAME = 'libpicket.so.0'

# --- The table of the C API --------------------------------------------------------------------------

Status = ctypes.c_int
Int = ctypes.c_int
Bool = ctypes.c_bool
Double = ctypes.c_double
Size = ctypes.c_size_t
Text = ctypes.c_char_p
Object = ctypes.c_void_p                        # anything opaque, and structs of records
Out = ctypes.POINTER(ctypes.c_void_p)           # where a new object goes
Doubles = ctypes.POINTER(ctypes.c_double)
OutInt = ctypes.POINTER(ctypes.c_int)


class Progress(ctypes.Structure):
    """picket_progress"""
    _fields_ = [('phase', Text), ('fraction', Double)]


AskProgress = ctypes.CFUNCTYPE(Int, ctypes.POINTER(Progress), Object)
TakeLog = ctypes.CFUNCTYPE(None, Int, Text, Object)


class ContextOptions(ctypes.Structure):
    """picket_context_options"""
    _fields_ = [('size', Size), ('allocate', Object), ('release', Object), ('memory_user', Object),
                ('log', TakeLog), ('log_user', Object), ('log_level', Int),
                ('progress', AskProgress), ('progress_user', Object)]


class OptionDescription(ctypes.Structure):
    """picket_option_description"""
    _fields_ = [('name', Text), ('usual', Double), ('least', Double), ('most', Double), ('whole', Int),
                ('help', Text)]


class SweepRequest(ctypes.Structure):
    """picket_sweep_request"""
    _fields_ = [('size', Size), ('question', Int), ('path', Text), ('count', Int), ('values', Doubles),
                ('journal_path', Text)]


# Structs with a size stamp, by their init functions; compared when the library is loaded.
STAMPED = {'picket_context_options_init': ContextOptions, 'picket_sweep_request_init': SweepRequest,
           'picket_match_request_init': records.MatchRequest.C}

FUNCTIONS = {
    # version.h
    'picket_version': (Text,),
    'picket_abi': (Int,),
    'picket_build': (Text,),
    'picket_struct_size': (Size, Text),
    'picket_struct_name': (Text, Int),
    # context.h, status.h
    'picket_status_name': (Text, Status),
    'picket_status_text': (Text, Status),
    'picket_context_options_init': (None, Object),
    'picket_context_options_init_sized': (None, Object, Size),
    'picket_context_set_log': (Status, Object, TakeLog, Object, Int),
    'picket_context_set_progress': (Status, Object, AskProgress, Object),
    'picket_context_create': (Status, Object, Out),
    'picket_context_free': (None, Object),
    'picket_context_message': (Text, Object),
    # options.h
    'picket_options_init': (None, Object),
    'picket_options_init_sized': (None, Object, Size),
    'picket_options_choose': (Status, Object, Object, Text, Double),
    'picket_option_at': (ctypes.POINTER(OptionDescription), Int),
    'picket_options_set': (Status, Object, Text, Double),
    # problem.h
    'picket_problem_create': (Status, Object, Out),
    'picket_problem_read_file': (Status, Object, Text, Out),
    'picket_problem_read_text': (Status, Object, Text, Size, Text, Out),
    'picket_problem_set': (Status, Object, Text, Text),
    'picket_problem_set_number': (Status, Object, Text, Double),
    'picket_problem_number': (Status, Object, Text, Doubles),
    'picket_problem_text': (Status, Object, Text, Out),
    'picket_problem_number_count': (Int, Object),
    'picket_problem_number_at': (Status, Object, Int, Out, Doubles),
    'picket_problem_check': (Status, Object),
    'picket_problem_free': (None, Object),
    # result.h, summary.h
    'picket_regime_name': (Text, Int),
    'picket_polarization_name': (Text, Int),
    'picket_result_complete': (Bool, Object),
    'picket_result_shortfall': (Text, Object),
    'picket_result_json': (Text, Object),
    'picket_result_csv': (Text, Object),
    'picket_result_json_get': (Status, Object, Out),
    'picket_result_csv_get': (Status, Object, Out),
    'picket_result_free': (None, Object),
    'picket_summary_find': (Status, Object, Out),
    'picket_summary_line': (Text, Object, Int),
    # field.h
    'picket_field_find': (Status, Object, Object, Int, Double, Int, Out),
    'picket_field_describe': (Status, Object, Object),
    'picket_field_size': (Status, Object, OutInt, OutInt),
    'picket_field_lines': (Status, Object, Int, Doubles, Size),
    'picket_field_component': (Status, Object, Int, Doubles, Size),
    'picket_field_permittivity': (Status, Object, Doubles, Size),
    'picket_component_name': (Text, Int),
    'picket_component_unit': (Text, Int),
    'picket_field_free': (None, Object),
    'picket_fields_write': (Status, Object, Object, Text),
    # section_field.h
    'picket_section_field_find': (Status, Object, Object, Double, Int, Out),
    'picket_section_field_describe': (Status, Object, Object),
    'picket_section_field_size': (Status, Object, Int, OutInt, OutInt),
    'picket_section_field_places': (Status, Object, Int, Int, Doubles, Size),
    'picket_section_field_component': (Status, Object, Int, Doubles, Size),
    'picket_section_field_permittivity': (Status, Object, Int, Doubles, Size),
    'picket_section_field_free': (None, Object),
    'picket_section_fields_write': (Status, Object, Object, Text),
    # edges.h, aim.h, index.h, modes.h, slab.h, besides what every study has
    'picket_edges_compare': (Status, Object, Object, Out),
    'picket_edges_comparison_count': (Int, Object),
    'picket_edges_comparison_get': (Status, Object, Int, Object),
    'picket_derivative_way_name': (Text, Int),
    'picket_side_name': (Text, Int),
    'picket_slab_polarization_name': (Text, Int),
    'picket_index_find_resumable': (Status, Object, Object, Text, Out),
    'picket_modes_find_resumable': (Status, Object, Object, Text, Out),
    'picket_taper_find_resumable': (Status, Object, Object, Text, Out),
    'picket_tolerance_find_resumable': (Status, Object, Object, Text, Out),
    'picket_taper_law_name': (Text, Int),
    'picket_taper_warning_name': (Text, Int),
    # match.h, sweep.h
    'picket_match_request_init': (None, Object),
    'picket_match_request_init_sized': (None, Object, Size),
    'picket_sweep_request_init': (None, Object),
    'picket_sweep_request_init_sized': (None, Object, Size),
    'picket_question_name': (Text, Int),
    'picket_sweep_spread': (Status, Double, Double, Int, Doubles),
    'picket_sweep_find': (Status, Object, Object, Object, Out),
    'picket_sweep_path': (Text, Object),
    'picket_sweep_value': (Status, Object, Int, Doubles),
}

# A study: the record of its answers, and what its function takes between the problem and the options.
STUDIES = {
    'edges': (records.EdgesAnswer,),
    'bands': (records.BandsAnswer,),
    'index': (records.IndexAnswer,),
    'slab': (records.SlabAnswer,),
    'modes': (records.ModesAnswer,),
    'aim': (records.AimAnswer,),
    'taper': (records.TaperAnswer,),
    'tolerance': (records.ToleranceAnswer,),
    'match': (records.MatchAnswer,),
    'edge_derivatives': (records.EdgeDerivatives, Text),
    'index_derivatives': (records.IndexDerivatives, Text),
}

for _study, (_answer, *_before) in STUDIES.items():
    FUNCTIONS[f'picket_{_study}_find'] = (Status, Object, *_before, Object, Out)
    FUNCTIONS[f'picket_{_study}_count'] = (Int, Object)
    FUNCTIONS[f'picket_{_study}_get'] = (Status, Object, Int, Object)
FUNCTIONS['picket_match_find'] = (Status, Object, Object, Object, Object, Out)


# --- Finding and checking it -------------------------------------------------------------------------

def _candidates():
    """Where the library may lie, the likeliest first."""
    here = pathlib.Path(__file__).resolve().parent
    if os.environ.get('PICKET_LIBRARY'):
        return [os.environ['PICKET_LIBRARY']]       # somebody chose: nothing else will do
    found = []
    try:
        from ._installed import LIBRARY             # written by `cmake --install`
        found.append(here / LIBRARY)
    except ImportError:
        pass
    found.append(here / NAME)                       # put beside the package by pip
    if here.parent.name == 'python' and here.parent.parent.name == 'bindings':
        found.append(here.parents[2] / 'build' / NAME)
    return [str(path) for path in found if path.exists()] + [NAME]


def _load():
    tried = []
    for path in _candidates():
        try:
            return ctypes.CDLL(path), path
        except OSError as error:
            tried.append(f'{path} ({error})')
    raise ImportError('the Picket library was not found; PICKET_LIBRARY may hold its path. Tried: ' + '; '.join(tried))


def _declare(library):
    for name, (answer, *arguments) in FUNCTIONS.items():
        try:
            function = getattr(library, name)
        except AttributeError:
            raise ImportError(f'{PATH} has no {name}: it is not the Picket library {__version__}') from None
        function.restype, function.argtypes = answer, arguments


def _stamped_size(init):
    """What an init function writes into the member `size`; the buffer is larger than any of the structs."""
    buffer = (ctypes.c_size_t * 512)()
    init(ctypes.addressof(buffer))
    return buffer[0]


def _check():
    """Until 1.0 the second number of a version rises when something promised changes: the structs too."""
    version = text(lib.picket_version())
    if version.split('.')[:2] != __version__.split('.')[:2]:
        raise ImportError(f'{PATH} is Picket {version}, this package is for {__version__}')
    for record in RECORDS:
        size = lib.picket_struct_size(record.c_name.encode())
        if size != ctypes.sizeof(record.C):
            raise ImportError(f'{PATH}: {record.c_name} has {size} bytes, must be {ctypes.sizeof(record.C)}')
    for init, struct in STAMPED.items():
        size = _stamped_size(getattr(lib, init))
        if size != ctypes.sizeof(struct):
            raise ImportError(f'{PATH}: the struct of {init} has {size} bytes, must be {ctypes.sizeof(struct)}')


def stamped(init):
    """A new struct with its size and its defaults in it."""
    struct = STAMPED[init]()
    getattr(lib, init)(ctypes.byref(struct))
    return struct


lib, PATH = _load()
_declare(lib)
_check()
OPTIONS_SIZE = _stamped_size(lib.picket_options_init)
