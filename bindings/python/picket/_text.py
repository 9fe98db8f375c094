"""Python values as the text of a problem file, in flow style on one line."""

import json
import math
import numbers
from collections.abc import Mapping

import numpy as np


def flow(value):
    """The text of a value: mapping, sequence, array, number, text, True or False."""
    if isinstance(value, Mapping):
        return '{' + ', '.join(f'{flow(str(key))}: {flow(entry)}' for key, entry in value.items()) + '}'
    if isinstance(value, (list, tuple, np.ndarray)):
        return '[' + ', '.join(flow(entry) for entry in value) + ']'
    if isinstance(value, str):
        return json.dumps(value, ensure_ascii=False)
    if isinstance(value, (bool, np.bool_)):
        return 'true' if value else 'false'
    if isinstance(value, numbers.Integral):
        return str(int(value))
    if isinstance(value, numbers.Real):
        return _real(float(value))
    raise TypeError(f'a problem cannot hold {value!r}, must be a mapping, a list, a number or a text')


def _real(value):
    if math.isnan(value):
        raise ValueError('a problem cannot hold a NaN, must be a number')
    if math.isinf(value):
        return '.inf' if value > 0 else '-.inf'
    return repr(value)  # all its digits


def is_number(value):
    """Whether a value goes to the library as a number."""
    return isinstance(value, numbers.Real) and not isinstance(value, (bool, np.bool_))
