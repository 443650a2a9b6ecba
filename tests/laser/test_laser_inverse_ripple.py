"""A coated facet's reflectivity from the ripple below threshold."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from fringe_spectra import AT_NM, SPACING_NM, Chip, spectrum

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    Amplifier,
    FringeSpectrum,
    Method,
    RippleReading,
    fringe_grid_nm,
    read_ripple,
    reflectivity_from_bare,
    reflectivity_from_ripple,
    ripple_spectrum,
)
from coatings.laser.inverse_shape import Shape, log_shape
from coatings.laser.student import t_quantile

STEADY = Chip(0.3, gain=0.0, slope=0.0, curve=0.0)
GHZ_A_FRINGE = 1e7 * SPACING_NM / AT_NM**2 * 29.9792458


@pytest.mark.parametrize("x", [0.03, 0.3, 0.8])
@pytest.mark.parametrize(
    ("fringes", "points"), [(3.3, 200), (6.5, 400), (25.0, 1000), (150.0, 5000)]
)
def test_perfect_fringes_give_the_truth(x, fringes, points):
    found = read_ripple(spectrum(replace(STEADY, x=x), fringes=fringes, points=points))
    assert found.x == pytest.approx(x, rel=1e-6)
    # Even in frequency: the spacing in wavelength goes with its square.
    assert found.spacing_nm == pytest.approx(SPACING_NM * (found.at_nm / AT_NM) ** 2, rel=1e-6)
    assert found.contrast == pytest.approx(((1 + x) / (1 - x)) ** 2, rel=1e-5)
    assert found.seen_contrast == pytest.approx(found.contrast, rel=1e-6)
    assert found.fringes == pytest.approx(min(fringes, 60.0), rel=0.02)
    assert found.spikes == 0


@pytest.mark.parametrize("fringes", [5.0, 25.0, 150.0])
def test_slow_gain_slope_and_dispersion_do_not_matter(fringes):
    chip = Chip(0.3, gain=0.05, slope=1.0, curve=-0.3, drift=0.5)
    found = read_ripple(spectrum(chip, fringes=fringes, points=int(40 * fringes)))
    assert found.x == pytest.approx(0.3, rel=2e-4)


def test_peaks_and_valleys_are_those_of_the_spectrum():
    # Slow twin: highest and lowest point of every fringe of a fine, perfect, level spectrum.
    seen = spectrum(STEADY, fringes=8.0, points=8001)
    found = read_ripple(seen)
    inner = seen.intensity[1:-1]
    tops = seen.wavelength_nm[1:-1][(inner > seen.intensity[:-2]) & (inner > seen.intensity[2:])]
    lows = seen.wavelength_nm[1:-1][(inner < seen.intensity[:-2]) & (inner < seen.intensity[2:])]
    assert found.peaks_nm == pytest.approx(tops, abs=2e-4)
    assert found.valleys_nm == pytest.approx(lows, abs=2e-4)
    assert found.contrast == pytest.approx(seen.intensity.max() / seen.intensity.min(), rel=1e-5)
    assert found.fitted == pytest.approx(seen.intensity, rel=1e-6)


@pytest.mark.parametrize("x", [0.1, 0.5, 0.85])
@pytest.mark.parametrize("resolution_nm", [0.01, 0.03, 0.05])
def test_resolution_is_corrected(x, resolution_nm):
    # The twin sums the instrument's line numerically.
    seen = spectrum(replace(STEADY, x=x), fringes=20.0, points=1200, resolution_nm=resolution_nm)
    found = read_ripple(seen, resolution_nm=resolution_nm)
    assert found.x == pytest.approx(x, rel=2e-4)
    # Fringes are narrower in wavelength at the blue end: contrast is not quite even.
    extremes = seen.intensity.max() / seen.intensity.min()
    assert found.seen_contrast == pytest.approx(extremes, rel=1e-2)
    assert found.seen_contrast < found.contrast
    # Without the correction x is too low.
    assert read_ripple(seen).x < 0.99 * x


def test_spectrum_of_an_amplifier_gives_its_facets_back():
    # The forward model of the laser room, parabola of the gain and loss included.
    chip = Amplifier(
        wavelength_nm=1550.0, length_um=1000.0, index=3.2, group_index=3.6, gain_dB=20.0,
        internal_loss_per_cm=10.0, gain_peak_nm=1545.0, gain_width_nm=60.0,
    )  # fmt: skip
    wavelength = fringe_grid_nm(chip, band_nm=(1540.0, 1560.0))
    front, rear = np.full(wavelength.size, 0.01 + 0.0j), np.full(wavelength.size, -0.05j)
    seen = ripple_spectrum(
        chip, wavelength_nm=wavelength, r_front=front, r_rear=rear,
        T_front=1.0 - abs(front) ** 2, T_rear=1.0 - abs(rear) ** 2,
    )  # fmt: skip
    reading = read_ripple(
        FringeSpectrum(wavelength, seen.gain), at_nm=1550.0, mode_spacing_GHz=seen.mode_spacing_GHz
    )
    assert reading.at_nm == pytest.approx(1550.0)
    assert reading.spacing_GHz == pytest.approx(seen.mode_spacing_GHz, rel=1e-5)
    found = reflectivity_from_ripple(reading, gain_dB=20.0, R_known=0.0025)
    # Sixty fringes take 20 nm: a parabola over wavelength is not quite one over wave number.
    assert found.R == pytest.approx(1e-4, rel=1e-3)
    assert found.method is Method.RIPPLE


def reading_of(x: float, *, sigma: float = 0.0, degrees: float = 50.0) -> RippleReading:
    plain = read_ripple(spectrum(STEADY, fringes=5.0, points=100))
    return replace(plain, x=x, ln_x_sigma=sigma, degrees=degrees)


def test_equal_facets_behind_a_peak_gain():
    # L4: single pass 5 dB, peak 20 dB, equal facets R = 0.27549 (printed 0.276; Kumar and Deen,
    # Fiber Optic Communications (2014), authors from memory): x = G R, and back.
    x = 10**0.5 * 0.27549
    found = reflectivity_from_ripple(reading_of(x), gain_dB=5.0, R_known=0.27549)
    assert found.R == pytest.approx(0.276, abs=6e-4)
    assert 10 * np.log10(10**0.5 * (1 - found.R) ** 2 / (1 - x) ** 2) == pytest.approx(
        20.0, abs=1e-3
    )


def test_ripple_before_and_after_coating():
    # One gain of 22 dB behind both; rear bare before, coated to 0.9 after.
    gain = 10**2.2
    before = reading_of(gain * 0.31 * 1e-3)
    after = reading_of(gain * np.sqrt(1e-6 * 0.9))
    product = (0.31 * 1e-3) ** 2
    found = reflectivity_from_bare(after, before, R_product_bare=product, R_known=0.9)
    assert found.R == pytest.approx(1e-6, rel=1e-12)
    assert any(note.startswith("Bare: ") for note in found.notes)


def test_errors_add_up():
    reading = reading_of(0.3, sigma=0.02, degrees=8.0)
    found = reflectivity_from_ripple(reading, gain_dB=20.0, R_known=0.3)
    assert np.log(found.R_high / found.R) == pytest.approx(0.04 * t_quantile(0.975, 8.0))
    assert np.log(found.R / found.R_low) == pytest.approx(0.04 * t_quantile(0.975, 8.0))
    assert found.degrees == pytest.approx(8.0)
    wider = reflectivity_from_ripple(
        reading_of(0.3), gain_dB=20.0, R_known=0.3, gain_sigma_dB=0.5, R_known_sigma=0.03
    )
    sigma = np.hypot(2 * 0.5 * np.log(10) / 10, 0.1)
    assert np.log(wider.R_high / wider.R) == pytest.approx(1.959964 * sigma, rel=1e-5)
    both = reflectivity_from_bare(
        reading, replace(reading, x=0.5), R_product_bare=0.09, R_known=0.3,
        R_product_bare_sigma=0.009, R_known_sigma=0.03,
    )  # fmt: skip
    # Welch and Satterthwaite by hand: two parts of 0.04 with 8 degrees, two exact ones of 0.1.
    variance = 2 * 0.04**2 + 2 * 0.1**2
    assert both.degrees == pytest.approx(variance**2 / (2 * 0.04**4 / 8.0))


@pytest.mark.parametrize(
    ("chip", "fringes", "points", "noise", "resolution_nm"),
    [
        (Chip(0.3), 4.0, 120, 0.01, 0.0),
        (Chip(0.1), 12.0, 300, 0.02, 0.0),
        (Chip(0.6), 8.0, 160, 0.03, 0.02),
    ],
)
def test_intervals_hold_the_truth(chip, fringes, points, noise, resolution_nm):
    rng = np.random.default_rng(11)
    inside, runs = 0, 60
    for _ in range(runs):
        seen = spectrum(
            chip, fringes=fringes, points=points, noise=noise, resolution_nm=resolution_nm, rng=rng
        )
        found = read_ripple(seen, resolution_nm=resolution_nm)
        reach = t_quantile(0.975, found.degrees) * found.ln_x_sigma
        inside += abs(np.log(found.x / chip.x)) <= reach
    # Three standard errors of a share of 95 % in 60 runs are 8.4 %.
    assert inside / runs > 0.866


def test_noise_does_not_widen_the_contrast():
    # Highest over lowest point does: with 5 % noise 1.02 reads as more than 1.2.
    rng = np.random.default_rng(12)
    seen = spectrum(replace(STEADY, x=0.02), fringes=20.0, points=4000, noise=0.05, rng=rng)
    assert seen.intensity.max() / seen.intensity.min() > 1.3
    found = read_ripple(seen)
    assert found.x == pytest.approx(0.02, abs=4 * found.ln_x_sigma * 0.02)
    assert found.contrast < 1.1


def test_spikes_are_left_out_and_said():
    rng = np.random.default_rng(13)
    clean = spectrum(STEADY, fringes=12.0, points=400, noise=0.01, rng=rng)
    spiked = clean.intensity.copy()
    spiked[[50, 200, 333]] *= 4.0
    found = read_ripple(FringeSpectrum(clean.wavelength_nm, spiked))
    assert found.spikes == 3
    assert found.x == pytest.approx(0.3, rel=5 * found.ln_x_sigma)
    assert any("3 points far off" in note for note in found.notes)


def test_neighbours_that_go_together_widen_the_interval():
    rng = np.random.default_rng(14)
    clean = spectrum(STEADY, fringes=12.0, points=600)
    noise = np.convolve(rng.standard_normal(606), np.ones(7) / 7**0.5, mode="valid")
    found = read_ripple(FringeSpectrum(clean.wavelength_nm, clean.intensity * np.exp(0.02 * noise)))
    assert any("Neighbouring residuals go together" in note for note in found.notes)
    apart = spectrum(STEADY, fringes=12.0, points=600, noise=0.02, rng=rng)
    assert found.ln_x_sigma > 1.5 * read_ripple(apart).ln_x_sigma


@pytest.mark.parametrize("blur", [0.0, 0.01, 0.3])
def test_derivatives_of_the_shape(blur):
    x, theta = np.array([0.2, 0.6, 0.9]), np.array([0.3, 2.0, 5.0])
    _, by_x, by_theta = log_shape(x, theta, blur=blur)
    step = 1e-6
    up, down = (log_shape(x + sign * step, theta, blur=blur)[0] for sign in (1, -1))
    assert by_x == pytest.approx((up - down) / (2 * step), rel=1e-6)
    up, down = (log_shape(x, theta + sign * step, blur=blur)[0] for sign in (1, -1))
    assert by_theta == pytest.approx((up - down) / (2 * step), rel=1e-6)


def test_shape_without_blur_is_the_sum_of_its_harmonics():
    x, theta = np.array([0.5, 0.5, 0.9]), np.array([0.1, 2.0, 3.0])
    k = np.arange(1, 400)[:, None]
    total = 1.0 + 2.0 * np.sum(x**k * np.cos(k * theta), axis=0)
    assert np.exp(log_shape(x, theta, blur=0.0)[0]) == pytest.approx(total, rel=1e-9)
    blurred = 1.0 + 2.0 * np.sum(np.exp(-0.05 * k**2) * x**k * np.cos(k * theta), axis=0)
    assert np.exp(log_shape(x, theta, blur=0.05)[0]) == pytest.approx(blurred, rel=1e-9)


@pytest.mark.parametrize("decay", [0.5, 0.0, -0.5])
def test_jacobian_of_the_fit(decay):
    s = np.linspace(-1.0, 1.0, 7)
    row = np.array([0.1, 0.2, -0.1, 0.5, 20.0, decay, 0.1, 0.2])
    shape = Shape(s, 1.0, 0.0, row[:3], row[3:5], row[5:])
    exact = shape.jacobian()
    for k in range(row.size):
        step = np.zeros(row.size)
        step[k] = 1e-6
        up, down = (shape.with_parameters(row + sign * step).logarithm() for sign in (1, -1))
        scale = np.abs(exact[:, k]).max()
        assert exact[:, k] == pytest.approx((up - down) / 2e-6, rel=1e-3, abs=1e-5 * scale)


@pytest.mark.parametrize("fringes", [1.0, 1.5, 2.0, 2.7])
@pytest.mark.parametrize("noise", [0.0, 0.01])
def test_fewer_than_three_fringes(fringes, noise):
    seen = spectrum(
        replace(STEADY, x=0.4), fringes=fringes, points=100, noise=noise,
        rng=np.random.default_rng(15),
    )  # fmt: skip
    with pytest.raises(InputError, match="fewer than three regular fringes"):
        read_ripple(seen)


def test_spectrum_just_short_of_three_fringes_is_told_so():
    with pytest.raises(InputError, match=r"shows 2\.9\d? fringes: fewer than three"):
        read_ripple(spectrum(STEADY, fringes=2.9, points=150))


def test_no_line_where_one_is_expected():
    seen = spectrum(STEADY, fringes=4.8, points=100)
    with pytest.raises(InputError, match="has no line near the spacing of group index and length"):
        read_ripple(seen, mode_spacing_GHz=GHZ_A_FRINGE * 4.8 / 3.3)


def test_expected_spacing_that_the_spectrum_can_not_show():
    seen = spectrum(STEADY, fringes=6.0, points=100)
    spacing = GHZ_A_FRINGE
    assert read_ripple(seen, mode_spacing_GHz=spacing).x == pytest.approx(0.3, rel=1e-6)
    with pytest.raises(InputError, match=r"spans 1\.2 mode spacings: fewer than three"):
        read_ripple(seen, mode_spacing_GHz=5.0 * spacing)
    with pytest.raises(InputError, match=r"has 1\.7 points a fringe"):
        read_ripple(seen, mode_spacing_GHz=0.1 * spacing)


def test_noise_alone_has_no_fringes():
    rng = np.random.default_rng(16)
    refused = 0
    for _ in range(25):
        try:
            read_ripple(
                spectrum(replace(STEADY, x=1e-9), fringes=20.0, points=200, noise=0.02, rng=rng)
            )
        except InputError as error:
            refused += "fewer than three regular fringes" in str(error)
    assert refused >= 24


def test_straight_and_short_spectra():
    wavelength = np.linspace(975.0, 977.0, 60)
    with pytest.raises(InputError, match="fewer than three regular fringes"):
        read_ripple(FringeSpectrum(wavelength, np.linspace(1.0, 2.0, 60)))
    with pytest.raises(InputError, match="holds 10 points: fewer than three"):
        read_ripple(FringeSpectrum(wavelength[:10], wavelength[:10]))


def test_peaks_narrower_than_the_points_apart():
    with pytest.raises(InputError, match="can't show peaks"):
        read_ripple(spectrum(replace(STEADY, x=0.95), fringes=20.0, points=200))


def test_resolution_that_hides_the_fringes():
    seen = spectrum(STEADY, fringes=10.0, points=300)
    with pytest.raises(InputError, match=r"0\.1 nm hides fringes of 0\.1 nm"):
        read_ripple(seen, resolution_nm=0.1)
    with pytest.raises(ArrayError, match="resolution_nm: falls to -1"):
        read_ripple(seen, resolution_nm=-1.0)


def test_place_outside_the_spectrum():
    with pytest.raises(ArrayError, match="980 nm lies outside the spectrum"):
        read_ripple(spectrum(STEADY, fringes=10.0, points=300), at_nm=980.0)


@pytest.mark.parametrize("at_nm", [975.6, 976.4])
def test_place_near_an_end(at_nm):
    chip = Chip(0.3, gain=0.05)
    found = read_ripple(spectrum(chip, fringes=10.0, points=500), at_nm=at_nm)
    u = (at_nm - AT_NM) / 0.5
    assert found.x == pytest.approx(0.3 * np.exp(-0.05 * u**2), rel=1e-3)


def test_spectra_that_can_not_be():
    row = np.linspace(975.0, 977.0, 30)
    with pytest.raises(ArrayError, match="not rows of one size"):
        FringeSpectrum(row, row[:20])
    with pytest.raises(ArrayError, match="does not rise"):
        FringeSpectrum(row[::-1], row)
    with pytest.raises(ArrayError, match="not decibels"):
        FringeSpectrum(row, row - 980.0)


def test_more_than_all_reflected():
    with pytest.raises(InputError, match="above 1: the gain is higher than given"):
        reflectivity_from_ripple(reading_of(0.9), gain_dB=0.0, R_known=0.3)
    with pytest.raises(InputError, match="not of one chip at one current"):
        reflectivity_from_bare(reading_of(0.9), reading_of(0.3), R_product_bare=0.1, R_known=0.3)
