"""The register of quantities: complete entries, shapes, refusals, and where nothing exists."""

import numpy as np
import pytest

from rlc.errors import InputError
from rlc.front.units import KINDS, show
from rlc.solver.case import Case
from rlc.solver.loop import ELEMENTS, make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Source, constant, sine

SOURCES = {
    "dc": constant(10.0),
    "sine": sine(10.0, 0.1, 0.3),
    "worst": sine(10.0, 0.1, None),
}


def batch(shape):
    number = int(np.prod(shape, dtype=int))
    resistance = np.geomspace(0.1, 8.0, number).reshape(shape)
    return make_loop(resistance=resistance, inductance=1.0, capacitance=1.0)


@pytest.mark.parametrize("name", REGISTER)
def test_every_entry_is_complete(name):
    entry = REGISTER[name]
    assert entry.name == name
    assert name == name.lower()
    assert name.isidentifier()
    for text in (entry.symbol, entry.definition, entry.formula, entry.source):
        assert text.strip()
    assert entry.definition.endswith(".")
    assert entry.kind in KINDS
    assert entry.group in ("loop", "steady", "switch-on")
    assert entry.at in (None, "frequency", "time", "ratio", "current", "voltage")
    # Peak, rms or mean is said wherever it can be meant.
    if entry.kind in ("current", "voltage", "power"):
        said = f"{entry.convention} {entry.definition}".lower()
        assert any(word in said for word in ("rms", "peak", "mean", "amplitude"))


def test_symbols_are_used_once():
    symbols = [entry.symbol for entry in REGISTER.values()]
    assert len(set(symbols)) == len(symbols)


@pytest.mark.parametrize("kind", SOURCES)
@pytest.mark.parametrize("name", REGISTER)
def test_every_quantity_has_the_batchs_shape(name, kind):
    # The search for peaks is the same for every shape; a small batch keeps it short.
    for shape in ((), (3,), (2, 1, 2)):
        value = REGISTER[name](Case(batch(shape), SOURCES[kind]))
        assert value.shape == shape
        assert value.dtype == np.float64
        show(float(value.flat[0]), REGISTER[name].kind)


@pytest.mark.parametrize("name", REGISTER)
def test_at_is_refused_where_there_is_none(name):
    entry, case = REGISTER[name], Case(batch(()), SOURCES["sine"])
    if entry.at is None:
        with pytest.raises(InputError) as caught:
            entry(case, at=1.0)
        assert caught.value.name == "at"
        return
    # a limit that is exceeded again and again is so for ever
    endless = entry.at in ("current", "voltage")
    assert endless or np.all(np.isfinite(entry(case, at=0.3)))
    for wrong in (0.0, -1.0, np.nan, np.inf):
        with pytest.raises(InputError) as caught:
            entry(case, at=wrong)
        assert caught.value.name == "at"


@pytest.mark.parametrize("name", REGISTER)
def test_across_is_refused_where_there_is_none(name):
    entry, case = REGISTER[name], Case(batch(()), SOURCES["sine"])
    if not entry.across:
        with pytest.raises(InputError) as caught:
            entry(case, across="capacitor")
        assert caught.value.name == "across"
        return
    values = [float(entry(case, across=element)) for element in ELEMENTS]
    assert len(set(values)) == len(ELEMENTS)
    with pytest.raises(InputError, match="wire"):
        entry(case, across="wire")


def test_a_level_of_a_constant_source_is_not_asked_for_at_a_frequency():
    case = Case(batch(()), SOURCES["dc"])
    with pytest.raises(InputError, match="dc source"):
        REGISTER["current"](case, at=50.0)
    # What does not depend on the level can be: it belongs to the loop.
    assert REGISTER["impedance"](case, at=0.1) > 0


def test_what_does_not_exist_is_not_a_number_or_infinite():
    def of(name, resistance=1.0, source=SOURCES["dc"], **more):
        loop = make_loop(resistance=resistance, inductance=1.0, capacitance=1.0, **more)
        return float(REGISTER[name](Case(loop, source)))

    # Overdamped: no ringing.
    assert np.isnan(of("ringing_frequency", 5.0))
    assert np.isnan(of("logarithmic_decrement", 5.0))
    assert of("capacitor_voltage_maximum_frequency", 5.0) == 0
    assert np.isnan(of("peak_capacitor_voltage_time", 5.0))
    # Critical: the ringing's frequency is zero just below, and there is none at it.
    assert np.isnan(of("ringing_frequency", 2.0))
    # Without losses: it rings for ever.
    assert of("time_constant", 0.0) == np.inf
    assert of("quality_factor", 0.0) == np.inf
    assert of("settling_time", 0.0) == np.inf
    assert of("let_through", 0.0) == np.inf
    assert of("logarithmic_decrement", 0.0) == 0
    assert of("bandwidth", 0.0) == 0
    # No steady current flows through a capacitor.
    assert of("impedance") == np.inf
    assert np.isnan(of("power_factor"))
    # A steady current has no end of its let-through.
    assert of("let_through", load_resistance=1.0) == np.inf
    # The worst angle is one only where it is asked for.
    for kind in ("dc", "sine"):
        assert np.isnan(of("worst_closing_angle_current", source=SOURCES[kind]))
        assert np.isnan(of("worst_closing_angle_capacitor_voltage", source=SOURCES[kind]))
    assert 0 <= of("worst_closing_angle_current", source=SOURCES["worst"]) < np.pi


def test_quantities_of_the_loop_do_not_depend_on_the_source():
    loop = batch((4,))
    for name, entry in REGISTER.items():
        if entry.group == "loop":
            values = [entry(Case(loop, source)) for source in SOURCES.values()]
            assert np.array_equal(values[0], values[1], equal_nan=True), name
            assert np.array_equal(values[0], values[2], equal_nan=True), name


def test_several_frequencies_make_a_sweep():
    loop = batch(())
    frequencies = np.array([0.01, 0.1, 1.0])
    swept = REGISTER["current"](Case(loop, Source(10.0, frequencies, 0.0)))
    assert swept.shape == (3,)
    for frequency, found in zip(frequencies, swept, strict=True):
        assert found == REGISTER["current"](Case(loop, sine(10.0, frequency)))
