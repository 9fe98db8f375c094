"""Pictures of results, if matplotlib is there. Axes come in and go out; nothing is shown or saved here."""

import numpy as np

from .records import Polarization
from .result import word


def _axes(axes):
    if axes is not None:
        return axes
    try:
        from matplotlib import pyplot
    except ImportError as missing:
        raise ImportError('plot needs matplotlib, which is not installed') from missing
    return pyplot.subplots()[1]


def draw(result, axes=None):
    """The picture of a study; raises ValueError if it has none."""
    if result.study not in _PICTURES:
        raise ValueError(f'there is no picture of {result.study}')
    axes = _axes(axes)
    for i, answer in enumerate(result):
        _PICTURES[result.study](axes, answer, word(answer), i)
    if axes.get_legend_handles_labels()[1]:
        axes.legend()
    return axes


def _bands(axes, answer, label, _):
    steps = np.hypot(*np.diff(answer.wavenumbers, axis=0).T)
    along = np.concatenate([[0], np.cumsum(steps)])
    lines = axes.plot(along, answer.frequencies)
    lines[0].set_label(label)
    for line in lines[1:]:
        line.set_color(lines[0].get_color())
    for gap in answer.gaps:
        axes.axhspan(gap.start.value, gap.to.value, color=lines[0].get_color(), alpha=0.15)
    marks = [(x, p.label) for x, p in zip(along, answer.points) if p.label]
    if marks:
        axes.set_xticks([x for x, _ in marks], [mark for _, mark in marks])
    else:
        axes.set_xlabel('k along the path, π/pitch')
    axes.set_ylabel('pitch/λ')


def _edges(axes, answer, label, height):
    for band in answer.bands:
        left, right = 1000 * band.short_um.value, 1000 * band.long_um.value
        axes.barh(height, right - left, left=left, height=0.4, color='0.4',
                  label='stop bands' if band.order == 1 and height == 0 else None)
        axes.annotate(str(band.order), ((left + right) / 2, height), color='white', ha='center', va='center')
    if answer.operating.given:
        axes.barh(height, 1000 * (answer.operating.to_um - answer.operating.from_um),
                  left=1000 * answer.operating.from_um, height=0.4, color='tab:green',
                  label=None if height else 'operating band')
    axes.set_yticks([*axes.get_yticks()[:height], height] if height else [0])
    axes.set_yticklabels([*[t.get_text() for t in axes.get_yticklabels()][:height], label])
    axes.set_ylim(-0.5, height + 0.5)
    axes.use_sticky_edges = False
    axes.set_xlabel('wavelength, nm')


def _against_wavelength(name):
    """A picture of a quantity of modes against the wavelength, a line for each order."""
    def picture(axes, answer, label, _):
        orders = sorted({mode.order for point in answer.points for mode in point.modes})
        for order in orders:
            found = [(1000 * point.wavelength_um, getattr(mode, name)) for point in answer.points
                     for mode in point.modes if mode.order == order]
            axes.errorbar([w for w, _ in found], [q.value for _, q in found],
                          yerr=[np.nan_to_num(q.uncertainty) for _, q in found], marker='.',
                          label=f'{label} {order}'.strip())
        axes.set_xlabel('wavelength, nm')
        axes.set_ylabel(name.replace('_', ' '))
    return picture


_PICTURES = {
    'bands': _bands,
    'edges': _edges,
    'index': _against_wavelength('bloch_index'),
    'slab': _against_wavelength('index'),
    'modes': _against_wavelength('index'),
}


def draw_field(field, component=None, axes=None):
    """The real part of a component over one pitch, with the factor exp(ikz)."""
    axes = _axes(axes)
    name = component or {Polarization.EY: 'Ey', Polarization.HY: 'Hy'}[field.description.polarization]
    values = (field[name] * field.wave[:, None]).real
    if values.shape[1] == 1:
        axes.plot(field.z_um, values[:, 0])
    else:
        axes.pcolormesh(field.z_um, field.x_um, values.T, shading='gouraud', cmap='RdBu')
        axes.set_ylabel('x, µm')
    axes.set_xlabel('z, µm')
    axes.set_title(f'Re {name}, {field.unit(name)}')
    return axes


def draw_section_field(field, component='Ex', axes=None):
    """The real part of a component over the section."""
    axes = _axes(axes)
    x, y = field.places(component)
    axes.pcolormesh(x, y, field[component].real.T, shading='gouraud', cmap='RdBu')
    axes.set_aspect('equal')
    axes.set_xlabel('x, µm')
    axes.set_ylabel('y, µm')
    axes.set_title(f'Re {component}, {field.unit(component)}')
    return axes
