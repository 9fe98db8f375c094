"""Objects: ways to make a problem, documents against records, failures as exceptions, lifetimes."""

import csv
import gc
import io
import math
import threading
import weakref

import numpy as np
import picket
import pytest
from conftest import SOURCE, film, stack

TEXT = '''
format: 1
materials: {film: {constant: {index: 2.0}}, below: {constant: {index: 1.45}}, above: {constant: {index: 1}}}
light: {wavelength_nm: 1550}
slab: {substrate: below, films: [{fill: film, thickness_nm: 400}], cover: above, polarization: te}
'''


def value(problem):
    return problem.slab()['te'].points[0].modes[0].index.value


# --- Making problems

def test_text_file_and_mapping_are_the_same(tmp_path):
    file = tmp_path / 'film.yaml'
    file.write_text(TEXT)
    expected = value(picket.Problem(film()))
    assert value(picket.Problem.from_text(TEXT)) == expected
    assert value(picket.Problem.from_file(file)) == expected
    assert value(picket.Problem.from_file(str(file))) == expected


def test_values_are_set():
    problem = picket.Problem(film())
    problem['slab.films.0.thickness_nm'] = 500
    assert problem['slab.films.0.thickness_nm'] == 500
    with pytest.raises(picket.InputError):
        problem['slab.films.7.thickness_nm']
    assert value(problem) == value(picket.Problem(film(thickness_nm=500)))
    problem.set('slab.films', [{'fill': 'film', 'thickness_nm': np.float64(400)}])
    problem['light.wavelength_nm'] = np.array([1550.0])
    assert value(problem) == value(picket.Problem(film()))
    problem['name'] = 'a "name": # Γ'
    assert problem.slab().to_dict()['name'] == 'a "name": # Γ'


def test_what_a_problem_says():
    problem = picket.Problem(stack())
    again = picket.Problem.from_text(problem.text())
    assert again.text() == problem.text()
    numbers = problem.numbers()
    assert len(numbers) > 5 and numbers['format'] == 1
    assert all(problem[path] == value == float(problem.text(path)) for path, value in numbers.items())
    with pytest.raises(picket.InputError):
        problem.text('cell.gone')
    problem.close()
    with pytest.raises(picket.PicketError):
        problem.numbers()


def test_all_digits_arrive():
    thickness = 400 * (1 + 2**-50)
    by_set, by_content = picket.Problem(film()), picket.Problem(film(thickness_nm=thickness))
    by_set['slab.films.0.thickness_nm'] = thickness
    assert value(by_set) == value(by_content)


def test_infinite_ends():
    # A lower half space of glass, given as a number and inside a block, is the same problem.
    open_cell = stack(wavelength_nm=1400)
    open_cell['cell'].update(lateral='open', shapes=[
        {'rect': {'fill': 'high', 'length_nm': 125, 'width_nm': 400}},
        {'stripe': {'fill': 'low', 'across': 'x', 'from_nm': -math.inf, 'to_nm': -2000}}])
    inside = picket.Problem(open_cell)
    inside.check()
    by_number = picket.Problem(open_cell)
    by_number['cell.shapes.1.from_nm'] = -2500
    assert by_number.summary().json() is not None
    by_number['cell.shapes.1.from_nm'] = -math.inf
    assert by_number.summary().json() == inside.summary().json()
    by_number['cell.shapes.1.from_nm'] = math.inf
    with pytest.raises(picket.InputError):
        by_number.check()


@pytest.mark.parametrize('wrong, kind', [(math.nan, ValueError), (object(), TypeError), ([1, math.nan], ValueError),
                                         (None, TypeError)])
def test_values_that_no_problem_holds(mirror, wrong, kind):
    with pytest.raises(kind):
        mirror['cell.pitch_nm'] = wrong
    mirror.check()


# --- Records, documents, columns

def test_json_holds_the_values_of_the_records(mirror):
    result = mirror.index(count=1)
    [document] = result.to_dict()['results']
    [answer] = result
    assert document['polarization'] == answer.polarization.word == 'ey'
    for said, point in zip(document['points'], answer.points, strict=True):
        assert said['wavelength_nm'] == pytest.approx(1000 * point.wavelength_um, rel=1e-15)
        for name in ('bloch_index', 'group_index', 'loss_db_per_cm'):
            quantity = getattr(point.modes[0], name)
            assert said['modes'][0][name]['value'] == quantity.value
            assert said['modes'][0][name]['uncertainty'] == quantity.uncertainty
        assert said['modes'][0]['regime'] == point.modes[0].regime.word
    assert result.complete and result.shortfall == ''


def test_json_of_edges_and_of_a_slab(mirror):
    result = mirror.edges()
    said = result.to_dict()['results'][0]['stop_bands'][0]
    assert said['long_nm']['value'] == pytest.approx(1000 * result[0].bands[0].long_um.value, rel=1e-15)
    assert said['attenuation_db_per_pitch']['value'] == result[0].bands[0].attenuation_db_per_pitch.value
    slab = picket.Problem(film()).slab()
    modes = slab.to_dict()['results'][0]['points'][0]['modes']
    assert [m['index']['value'] for m in modes] == [m.index.value for m in slab[0].points[0].modes]


def test_csv_has_the_rows_of_the_columns(mirror):
    result = mirror.index()
    rows = list(csv.DictReader(io.StringIO(result.csv())))
    columns = result.columns()
    assert [float(row['wavelength_nm']) for row in rows] == pytest.approx(1000 * columns['wavelength_um'])
    assert {len(column) for column in columns.values()} == {len(rows)}
    assert columns['regime'].dtype == object and columns['bloch_index'].dtype == float
    assert list(columns['polarization']) == ['ey', 'ey'] and list(columns['order']) == [0, 0]


def test_columns_of_every_study(mirror):
    bands = mirror.bands(count=2, points=3)
    assert len(bands.columns()['frequency']) == 4 * 2
    assert list(bands.columns()['band'][:3]) == [0, 1, 0]
    assert bands.columns()['frequency'][3] == bands[0].frequencies[1, 1]
    edges = mirror.edges(count=2).columns()
    assert list(edges['order']) == [1, 2] and edges['operating_regime'][0] == 'subwavelength'
    nothing = picket.Problem(film(cover=1.0, thickness_nm=1)).slab().columns()
    assert list(nothing['wavelength_um']) == pytest.approx([1.55]) and 'index' not in nothing


def test_a_row_that_lacks_something_has_nan():
    table = picket.result.table([{'a': 1, 'b': 'x'}, {'a': None, 'c': 2.5}])
    assert table['a'][0] == 1 and math.isnan(table['a'][1]) and math.isnan(table['c'][0])
    assert list(table['b']) == ['x', None]


def test_results_are_sequences(mirror):
    mirror['light.polarization'] = 'both'
    result = mirror.edges()
    assert len(result) == 2 and [a.polarization.word for a in result] == ['ey', 'hy']
    assert result['hy'] is result[1] is result[-1]
    with pytest.raises(KeyError):
        result['te']
    with pytest.raises(IndexError):
        result[2]


def test_quantities():
    q = picket.Quantity(1.4237120914, 0.000021, None)
    assert str(q) == '1.423712 ± 0.000021' and float(q) == q.value
    assert str(picket.Quantity(1 / 3, math.nan, 'why')) == '0.3333333333 ± unknown'
    assert str(picket.Quantity(0.0, 0.0, None)) == '0 ± 0'
    assert np.array([q, q], dtype=float).sum() == 2 * q.value


def test_summary():
    with picket.Problem.from_file(SOURCE / 'examples' / 'bus_section.yaml').summary() as summary:
        assert any(line.startswith('cell.duty') for line in summary.lines)
        assert str(summary) == '\n'.join(summary.lines)
        assert summary.to_dict()['command'] == 'check'


def test_an_index_sweep_goes_on_from_its_journal(mirror, tmp_path):
    journal = tmp_path / 'sweep.journal'
    first = mirror.index(journal=journal)
    assert journal.stat().st_size > 0
    asked = []
    again = mirror.index(journal=str(journal), progress=lambda phase, fraction: asked.append(fraction))
    assert again.json() == first.json() == mirror.index(jobs=2).json()
    with pytest.raises(picket.InputError):
        mirror.index(journal=journal, count=2)


def test_a_sweep_gives_what_the_question_alone_gives(tmp_path):
    problem, pitches = picket.Problem(stack(polarization='both')), [290, 300.5, 310]
    journal = tmp_path / 'sweep.journal'
    result = problem.sweep('edges', 'cell.pitch_nm', pitches, journal=journal)
    assert (result.study, result.path, len(result)) == ('edges', 'cell.pitch_nm', 6)
    np.testing.assert_array_equal(result.values, np.repeat(pitches, 2))
    columns = result.columns()
    assert next(iter(columns)) == 'cell.pitch_nm'
    np.testing.assert_array_equal(columns['cell.pitch_nm'], result.values)
    for i, pitch in enumerate(pitches):
        alone = picket.Problem(stack(polarization='both'))
        alone['cell.pitch_nm'] = pitch
        assert [a.bands[0].long_um for a in alone.edges()] == [a.bands[0].long_um for a in result[2 * i:2 * i + 2]]
    again = problem.sweep(picket.Question.EDGES, 'cell.pitch_nm', np.array(pitches), journal=journal, jobs=2)
    assert again.json() == result.json()
    assert problem.edges().path is None and problem.edges().values is None


def test_a_value_that_fails_is_marked():
    result = picket.Problem(film()).sweep('slab', 'slab.films.0.thickness_nm', [400, -1])
    good, bad = result
    assert not good.failed and good.note is None
    assert bad.failed and bad.note and bad.points == ()
    columns = result.columns()
    assert list(columns['failed']) == [False, True] and math.isnan(columns['index'][1]) and not result.complete
    with pytest.raises(ValueError, match='question is'):
        picket.Problem(film()).sweep('bands', 'slab.films.0.thickness_nm', [400])
    with pytest.raises(picket.InputError):
        picket.Problem(film()).sweep('slab', 'slab.cover', [400])
    with pytest.raises(picket.ArgumentError):
        picket.Problem(film()).sweep('slab', 'slab.films.0.thickness_nm', [])


def test_fields_are_written(mirror, tmp_path):
    h5py = pytest.importorskip('h5py')
    path = tmp_path / 'fields.h5'
    mirror.write_fields(path)
    with mirror.field('ey', 1.3) as field, h5py.File(path) as file:
        np.testing.assert_array_equal(file['ey/1300nm/mode0/z_um'][:], field.z_um)
        np.testing.assert_allclose(file['ey/1300nm/mode0/Ey'][:], field['Ey'], rtol=1e-9)
    with pytest.raises(picket.OutputError) as caught:
        mirror.write_fields(tmp_path / 'no such folder' / 'fields.h5')
    assert isinstance(caught.value, OSError)


# --- Options

def test_options_are_those_of_the_library():
    known = picket.options()
    assert {'accuracy', 'count', 'unknowns', 'points', 'jobs'} <= set(known)
    accuracy = known['accuracy']
    assert (accuracy.usual, accuracy.least, accuracy.most, accuracy.whole) == (1e-4, 1e-8, 1e-2, False)
    assert accuracy.help and known['count'].whole


def test_options_out_of_range(mirror):
    for name, option in picket.options().items():
        for wrong in (option.least - 1, option.most * 2, math.nan, math.inf):
            with pytest.raises(picket.ArgumentError, match=name):
                mirror.edges(**{name: wrong})
    with pytest.raises(picket.ArgumentError, match="unknown option 'acuracy', must be one of accuracy"):
        mirror.edges(acuracy=1e-3)
    with pytest.raises(picket.ArgumentError, match='whole number'):
        mirror.edges(count=1.5)


# --- Failures

def test_exceptions_by_status():
    cases = [
        (lambda: picket.Problem.from_text('['), picket.InputError, picket.Status.ERROR_INPUT, ValueError),
        (lambda: picket.Problem.from_file('/no/such.yaml'), picket.FileError, picket.Status.ERROR_FILE, OSError),
        (lambda: picket.Problem.from_file(''), picket.ArgumentError, picket.Status.ERROR_ARGUMENT, ValueError),
        (lambda: picket.Problem({'ptich': 1}).check(), picket.InputError, picket.Status.ERROR_INPUT, ValueError),
        (lambda: picket.Problem(stack()).slab(), picket.InputError, picket.Status.ERROR_INPUT, ValueError),
        (lambda: picket.Problem(stack()).field('ey', 1.4, 3), picket.NoModeError, picket.Status.ERROR_NO_MODE,
         picket.NumbersError),
        (lambda: picket.Problem(stack()).field('ey', -1), picket.ArgumentError, picket.Status.ERROR_ARGUMENT,
         picket.RequestError),
    ]
    for call, kind, status, base in cases:
        with pytest.raises(kind) as caught:
            call()
        assert caught.value.status is status and isinstance(caught.value, base)
        assert isinstance(caught.value, picket.PicketError) and str(caught.value)


def test_material_range():
    problem = picket.Problem(film(wavelength_nm=300))
    problem['materials.film'] = {'catalogue': 'silicon'}
    with pytest.raises(picket.MaterialRangeError, match='300'):
        problem.slab()


def test_the_sentence_says_where():
    problem = picket.Problem(stack())
    problem['cell.pitch_nm'] = -3
    with pytest.raises(picket.InputError) as caught:
        problem.check()
    assert str(caught.value) == 'set cell.pitch_nm: cell.pitch_nm is -3, must be above 0 and at most 1000000 nm'
    assert problem.context.message == str(caught.value)


def test_every_status_has_a_class():
    kinds = {type(picket.errors.error(status, 'x')) for status in picket.Status if status}
    assert len(kinds) == len(picket.Status) - 1 and picket.PicketError not in kinds
    unknown = picket.errors.error(-99, 'of a later version')
    assert type(unknown) is picket.PicketError and unknown.status == -99
    for words, name in ((picket.Polarization, 'polarization'), (picket.Regime, 'regime')):
        for member in words:
            assert getattr(picket._lib, f'picket_{name}_name')(member).decode() == member.word
    for status in picket.Status:
        assert picket._lib.picket_status_name(status).decode() == f'PICKET_{status.name}'


def test_words_that_are_no_polarization(mirror):
    with pytest.raises(ValueError, match="polarization is 'te', must be one of 'ey', 'hy', 'tm-like', 'te-like'"):
        mirror.field('te', 1.4)
    with mirror.field('ey', 1.4) as field, pytest.raises(KeyError):
        field['Fx']


# --- Lifetimes

def test_closed_objects_say_so(mirror):
    context = picket.Context()
    problem = picket.Problem(film(), context=context)
    result, field = problem.slab(), mirror.field('ey', 1.4)
    answers = result.answers
    for thing, uses in ((result, [result.json, result.csv, result.columns, lambda: result[0], lambda: result.complete]),
                        (field, [lambda: field['Ey'], lambda: field.shape, lambda: field.description]),
                        (problem, [problem.slab, problem.check, problem.summary, lambda: problem.set('name', 'x')]),
                        (context, [lambda: picket.Problem(context=context), lambda: context.message])):
        assert not thing.closed
        thing.close()
        thing.close()
        assert thing.closed and 'closed' in repr(thing)
        for use in uses:
            with pytest.raises(picket.ClosedError, match='is closed'):
                use()
        with pytest.raises(picket.ClosedError), thing:
            pass
    assert answers[0].points[0].modes[0].index.value > 1     # copied out


def test_with_frees(mirror, monkeypatch):
    freed = []
    for make, name in ((mirror.edges, 'picket_result_free'), (lambda: mirror.field('ey', 1.4), 'picket_field_free')):
        with make() as thing:
            real = thing._free
            thing._free = lambda pointer, real=real, name=name: (freed.append(name), real(pointer))
            assert name not in freed
        assert freed.count(name) == 1
        del thing
        gc.collect()
        assert freed.count(name) == 1       # not a second time


def test_objects_go_with_their_last_name():
    context = picket.Context()
    gone = weakref.ref(context)
    problem = picket.Problem(film(), context=context)
    result = problem.slab()
    del context
    assert gone() is not None
    del problem
    assert result.json()
    del result
    assert gone() is None       # at once, without the collector of cycles


def test_any_order_of_closing():
    context = picket.Context()
    problem = picket.Problem(film(), context=context)
    context.close()
    result = problem.slab()
    problem.close()
    assert '"slab"' in result.json()
    result.close()


# --- Threads

def test_two_contexts_in_two_threads():
    thicknesses = [300, 350, 400, 450]
    expected = [value(picket.Problem(film(thickness_nm=t))) for t in thicknesses]
    edges = picket.Problem(stack()).edges()[0].bands[0].long_um.value
    found, failures = {}, []

    def work(which):
        try:
            problem, mirror = picket.Problem(film()), picket.Problem(stack())
            answers = []
            for thickness in thicknesses:
                problem['slab.films.0.thickness_nm'] = thickness
                answers.append(value(problem))
            found[which] = answers, mirror.edges()[0].bands[0].long_um.value
        except BaseException as failure:
            failures.append(failure)

    threads = [threading.Thread(target=work, args=(i,)) for i in range(2)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert not failures
    assert found == {i: (expected, edges) for i in range(2)}
