"""Laws that preprocessing keeps whatever the spectra."""

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from sklearn.base import clone

from quant.preprocessing.absorbance import Absorbance
from quant.preprocessing.asymmetric_baseline import AsymmetricBaseline, asymmetric_baseline
from quant.preprocessing.baseline import StraightBaseline, straight_baseline
from quant.preprocessing.centre import MeanCentre
from quant.preprocessing.detrend import Detrend, detrend
from quant.preprocessing.emsc import EMSC, emsc
from quant.preprocessing.gap_derivative import GapDerivative, gap_derivative
from quant.preprocessing.msc import MSC, msc
from quant.preprocessing.normalise import NormaliseBand, UnitArea, UnitLength, normalise_band, unit_area, unit_length
from quant.preprocessing.orthogonal_removal import OrthogonalRemoval, orthogonal_directions, remove_directions
from quant.preprocessing.ranges import KeepRanges, LeaveOutRanges, inside_ranges
from quant.preprocessing.registry import STEPS
from quant.preprocessing.resample import Resample
from quant.preprocessing.savitzky_golay import SavitzkyGolay, savitzky_golay
from quant.preprocessing.scale import ScaleColumns
from quant.preprocessing.snv import SNV, snv

seeds = st.integers(0, 2**32 - 1)
factors = st.floats(0.01, 100)
offsets = st.floats(-10, 10)
AXIS = np.concatenate([np.arange(2000.0, 1900.0, -4.0), np.arange(1800.0, 1700.0, -4.0)])  # falling, with a cut
BANDS = np.stack([np.exp(-(((AXIS - centre) / 20) ** 2)) for centre in (1960.0, 1930.0, 1750.0)])
SPECTRA_GIVEN = ("interferents", "analytes", "differences")  # parameters that are spectra


def random_spectra(seed, n_spectra=6, points=AXIS.size):
    """Positive spectra between 0.1 and 0.9, so that they may stand for transmittance."""
    return 0.1 + 0.8 * np.random.default_rng(seed).random((n_spectra, points))


@given(seeds, factors, offsets)
def test_snv_ignores_scale_and_offset(seed, factor, offset):
    spectra = random_spectra(seed)
    np.testing.assert_allclose(snv(factor * spectra + offset), snv(spectra), atol=1e-10)


@given(seeds, st.integers(2, 60))
def test_snv_rows_have_mean_0_and_standard_deviation_1(seed, points):
    result = snv(random_spectra(seed, points=points))
    np.testing.assert_allclose(result.mean(axis=1), 0.0, atol=1e-10)
    np.testing.assert_allclose(result.std(axis=1, ddof=1), 1.0, rtol=1e-12)


@given(seeds, st.lists(st.tuples(factors, offsets), min_size=1, max_size=5))
def test_msc_returns_the_reference_for_every_affine_copy(seed, pairs):
    reference = random_spectra(seed, 1)[0]
    copies = np.array([factor * reference + offset for factor, offset in pairs])
    np.testing.assert_allclose(msc(copies, reference), np.tile(reference, (len(pairs), 1)), atol=1e-9)


@given(seeds)
def test_msc_leaves_corrected_spectra_alone(seed):
    spectra = random_spectra(seed)
    reference = spectra.mean(axis=0)
    once = msc(spectra, reference)
    np.testing.assert_allclose(msc(once, reference), once, atol=1e-9)


@given(
    st.tuples(*[st.floats(-3, 3)] * 5),
    st.integers(0, 4),
    st.sampled_from([7, 9, 15]),
    st.sampled_from([1.0, -1.0]),
    st.floats(0.25, 8),
)
def test_derivatives_of_polynomials_are_exact_on_rising_and_falling_axes(coefficients, derivative, window, sign, step):
    axis = 1500 + sign * step * np.arange(40)
    polynomial = np.polynomial.Polynomial(coefficients, domain=[axis.min(), axis.max()])
    expected = polynomial.deriv(derivative)(axis) if derivative else polynomial(axis)
    ours = savitzky_golay(polynomial(axis)[np.newaxis], window, 4, derivative, axis)[0]
    np.testing.assert_allclose(ours, expected, atol=1e-11 * 15 / step**derivative * 4**derivative)


@given(seeds, st.integers(0, 4), st.floats(1e-3, 1e3))
def test_another_unit_of_the_axis_scales_a_derivative_by_its_power(seed, derivative, factor):
    spectra = random_spectra(seed)
    first = savitzky_golay(spectra, 9, 4, derivative, AXIS)
    second = savitzky_golay(spectra, 9, 4, derivative, AXIS * factor)
    np.testing.assert_allclose(second * factor**derivative, first, rtol=1e-9, atol=1e-12)


@given(seeds, st.sampled_from([(5, 2, 0), (9, 3, 1), (11, 2, 2)]), factors, offsets)
def test_smoothing_is_linear(seed, numbers, a, b):
    x, y = random_spectra(seed), random_spectra(seed + 1)
    together = savitzky_golay(a * x + b * y, *numbers, AXIS)
    apart = a * savitzky_golay(x, *numbers, AXIS) + b * savitzky_golay(y, *numbers, AXIS)
    np.testing.assert_allclose(together, apart, atol=1e-10 * (a + abs(b)))


def equivariant_steps():
    return [
        Absorbance(AXIS),
        KeepRanges([[1990, 1930], [1790, 1750]], AXIS),
        LeaveOutRanges([[1950, 1780]], AXIS),
        SNV(),
        MSC(),
        EMSC(2, BANDS[:2], BANDS[2:], AXIS),
        UnitLength(),
        UnitArea(AXIS),
        NormaliseBand("area", (1990, 1920), axis=AXIS),
        NormaliseBand("height_at", position=1733.3, axis=AXIS),
        GapDerivative(3, 5, 1, AXIS),
        GapDerivative(4, 3, 2, AXIS),
        Detrend(2, AXIS),
        AsymmetricBaseline(1e3, 0.05, axis=AXIS),
        OrthogonalRemoval(BANDS, 2),
        SavitzkyGolay(7, 2, 0, AXIS),
        SavitzkyGolay(9, 3, 1, AXIS),
        SavitzkyGolay(11, 2, 2, AXIS),
        StraightBaseline(1990.5, 1713, AXIS),
        StraightBaseline(axis=AXIS),
        MeanCentre(),
        ScaleColumns(),
    ]


@pytest.mark.parametrize("step", equivariant_steps(), ids=repr)
@given(seed=seeds)
@settings(max_examples=20)
def test_reversed_spectra_on_a_reversed_axis_give_the_reversed_result(step, seed):
    spectra = random_spectra(seed)
    mirrored = clone(step)
    if "axis" in step.get_params():
        mirrored.set_params(axis=AXIS[::-1])
    mirrored.set_params(**{name: value[:, ::-1] for name, value in step.get_params().items() if name in SPECTRA_GIVEN})
    there = clone(step).fit_transform(spectra)
    back = mirrored.fit_transform(spectra[:, ::-1])[:, ::-1]
    np.testing.assert_allclose(back, there, rtol=1e-10, atol=1e-12)
    np.testing.assert_array_equal(step.axis_after(AXIS[::-1]), step.axis_after(AXIS)[::-1])


@given(seeds)
def test_resampling_a_reversed_axis(seed):
    """With start and stop given the result runs from one to the other either way; without, it runs as the axis does."""
    axis = AXIS[:25]
    spectra = random_spectra(seed, points=25)
    there = Resample(1995, 1910, 1.7, axis).fit_transform(spectra)
    back = Resample(1995, 1910, 1.7, axis[::-1]).fit_transform(spectra[:, ::-1])
    np.testing.assert_allclose(back, there, atol=1e-12)
    there = Resample(spacing=2.0, axis=axis).fit_transform(spectra)
    back = Resample(spacing=2.0, axis=axis[::-1]).fit_transform(spectra[:, ::-1])
    np.testing.assert_allclose(back[:, ::-1], there, atol=1e-12)


def test_every_step_is_among_those_reversed():
    assert {type(step) for step in equivariant_steps()} | {Resample} == set(STEPS.values())


@given(st.lists(st.tuples(st.floats(1700, 2000), st.floats(1700, 2000)), min_size=1, max_size=4))
def test_keeping_and_leaving_out_are_complements(ranges):
    held = [((min(pair) <= AXIS) & (max(pair) >= AXIS)).any() for pair in ranges]
    assume(all(held) and not inside_ranges(AXIS, ranges).all())
    kept, left = KeepRanges(ranges).axis_after(AXIS), LeaveOutRanges(ranges).axis_after(AXIS)
    np.testing.assert_array_equal(np.sort(np.concatenate([kept, left])), np.sort(AXIS))


@given(seeds, st.floats(1700.5, 1999.5), st.floats(1700.5, 1999.5), offsets, st.floats(-0.1, 0.1))
def test_a_straight_line_added_is_taken_away_again(seed, first, second, offset, slope):
    axis = np.arange(2000.0, 1698.0, -4.0)
    assume(abs(first - second) > 4)
    spectra = random_spectra(seed, points=axis.size)
    line = offset + slope * (axis - 1850)
    plain = straight_baseline(spectra, axis, first, second)
    np.testing.assert_allclose(straight_baseline(spectra + line, axis, first, second), plain, atol=1e-9)


@given(seeds)
def test_the_order_of_the_samples_does_not_matter(seed):
    spectra = random_spectra(seed)
    order = np.random.default_rng(seed).permutation(len(spectra))
    for step in (MSC(), EMSC(axis=AXIS), MeanCentre(), ScaleColumns()):
        shuffled = clone(step).fit(spectra[order]).transform(spectra)
        np.testing.assert_allclose(shuffled, clone(step).fit_transform(spectra), rtol=1e-11, atol=1e-12)


@given(seeds, st.lists(st.integers(1, 3), min_size=6, max_size=6))
def test_a_weight_of_k_is_the_same_spectrum_k_times(seed, times):
    spectra = random_spectra(seed)
    for step in (MSC(), EMSC(axis=AXIS), MeanCentre(), ScaleColumns()):
        weighted = clone(step).fit(spectra, sample_weight=times).transform(spectra)
        repeated = clone(step).fit(np.repeat(spectra, times, axis=0)).transform(spectra)
        np.testing.assert_allclose(weighted, repeated, rtol=1e-11, atol=1e-12)


@given(seeds, factors)
def test_absorbances_of_stacked_layers_add(seed, factor):
    first, second = random_spectra(seed), random_spectra(seed + 1)
    total = Absorbance().fit_transform(first * second)
    np.testing.assert_allclose(
        total, Absorbance().fit_transform(first) + Absorbance().fit_transform(second), atol=1e-14
    )


@pytest.mark.parametrize("step", [*equivariant_steps(), Resample(spacing=3.0, axis=AXIS[:25])], ids=repr)
@given(seed=seeds)
@settings(max_examples=10)
def test_the_steps_called_linear_are_those_that_learn_nothing_and_turn_sums_into_sums(step, seed):
    points = 25 if isinstance(step, Resample) else AXIS.size
    first, second = random_spectra(seed, points=points), random_spectra(seed + 1, points=points)
    fitted = clone(step).fit(first)
    together = fitted.transform(0.2 * first + 0.3 * second)
    apart = 0.2 * fitted.transform(first) + 0.3 * fitted.transform(second)
    assert step.linear == (not step.learns and np.allclose(together, apart, rtol=1e-9, atol=1e-11))


@given(seeds, st.lists(st.tuples(factors, *[offsets] * 5), min_size=1, max_size=5))
def test_emsc_finds_the_reference_under_baseline_and_interferents_and_leaves_analytes(seed, numbers):
    reference = random_spectra(seed, 1)[0]
    t = (AXIS - 1850) / 150
    b, offset, line, bend, interferent, analyte = np.array(numbers).T[..., np.newaxis]
    kept = b * reference + analyte * BANDS[2]
    spectra = kept + offset + line * t + bend * t**2 + interferent * BANDS[0]
    corrected = emsc(spectra, reference, AXIS, 2, BANDS[:1], BANDS[2:])
    np.testing.assert_allclose(corrected * b, kept, rtol=1e-9, atol=1e-7)


@given(seeds)
def test_emsc_with_nothing_but_an_offset_is_msc(seed):
    spectra = random_spectra(seed)
    reference = 0.5 * spectra.mean(axis=0) + random_spectra(seed + 1, 1)[0]
    ours = emsc(spectra + reference, reference, AXIS, polynomial=0)
    np.testing.assert_allclose(ours, msc(spectra + reference, reference), rtol=1e-9, atol=1e-10)


@given(seeds, st.integers(0, 5), offsets, offsets)
def test_a_polynomial_added_is_taken_out_by_detrend_and_then_nothing_is_left_to_do(seed, degree, constant, highest):
    spectra = random_spectra(seed)
    once = detrend(spectra, AXIS, degree)
    t = (AXIS - 1850) / 150
    np.testing.assert_allclose(detrend(spectra + constant + highest * t**degree, AXIS, degree), once, atol=1e-12)
    np.testing.assert_allclose(detrend(once, AXIS, degree), once, atol=1e-13)


@given(seeds, st.floats(1, 9), st.floats(0.001, 0.5), offsets, st.floats(-0.1, 0.1))
@settings(max_examples=25, deadline=None)
def test_a_line_is_its_own_smooth_baseline_and_shifts_that_of_what_it_is_added_to(seed, power, p, offset, slope):
    line = offset + slope * (AXIS - 1850)
    straight = asymmetric_baseline(line[np.newaxis], 10**power, p, axis=AXIS)
    np.testing.assert_allclose(straight[0], line, rtol=1e-12, atol=1e-12)
    spectra = random_spectra(seed, 3)
    plain = asymmetric_baseline(spectra, 10**power, p, axis=AXIS)
    np.testing.assert_allclose(asymmetric_baseline(spectra + line, 10**power, p, axis=AXIS), plain + line, atol=1e-9)


@given(seeds, factors)
def test_normalising_ignores_scale(seed, factor):
    spectra = random_spectra(seed) - 0.3  # of either sign
    band = {"signal": "area", "range": [1996, 1904], "baseline": [1996, 1904]}
    banded = random_spectra(seed) + 5 * BANDS[0]
    np.testing.assert_allclose(unit_length(factor * spectra), unit_length(spectra), rtol=1e-11)
    np.testing.assert_allclose(unit_area(factor * spectra, AXIS), unit_area(spectra, AXIS), rtol=1e-11)
    once = normalise_band(banded, band, AXIS)
    np.testing.assert_allclose(normalise_band(factor * banded, band, AXIS), once, rtol=1e-10)
    np.testing.assert_allclose(normalise_band(once, band, AXIS), once, rtol=1e-10)


@given(seeds)
def test_normalised_spectra_have_the_size_one(seed):
    spectra = random_spectra(seed) - 0.3
    np.testing.assert_allclose(np.linalg.norm(unit_length(spectra), axis=1), 1, rtol=1e-13)
    scaled = np.abs(unit_area(spectra, AXIS))
    areas = [-np.trapezoid(scaled[:, part], AXIS[part], axis=1) for part in (slice(25), slice(25, 50))]
    np.testing.assert_allclose(np.sum(areas, axis=0), 1, rtol=1e-12)


@given(
    st.tuples(*[st.floats(-3, 3)] * 3),
    st.integers(1, 5),
    st.sampled_from([1, 3, 5]),
    st.sampled_from([1, 2]),
    st.sampled_from([1.0, -1.0]),
    st.floats(0.25, 8),
)
def test_gap_derivatives_of_parabolas_are_exact_on_rising_and_falling_axes(numbers, gap, segment, order, sign, step):
    axis = 1500 + sign * step * np.arange(30)
    parabola = np.polynomial.Polynomial(numbers, domain=[axis.min(), axis.max()])
    kept = GapDerivative(gap, segment, order).axis_after(axis)
    ours = gap_derivative(parabola(axis)[np.newaxis], gap, segment, order, axis)[0]
    np.testing.assert_allclose(ours, parabola.deriv(order)(kept), rtol=1e-9, atol=1e-12 / step**order)


@given(seeds, st.integers(1, 3), offsets)
def test_what_is_removed_orthogonally_may_be_there_in_any_amount(seed, components, amount):
    spectra = random_spectra(seed)
    directions = orthogonal_directions(BANDS, components)
    once = remove_directions(spectra, directions)
    np.testing.assert_allclose(once @ directions.T, 0, atol=1e-13)
    np.testing.assert_allclose(remove_directions(spectra + amount * directions[-1], directions), once, atol=1e-12)
    if components == len(BANDS):
        np.testing.assert_allclose(remove_directions(spectra + amount * BANDS[1], directions), once, atol=1e-12)
