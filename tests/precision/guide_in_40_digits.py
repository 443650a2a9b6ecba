"""The slow, obvious twin of the guide solver: transfer matrices in 40-digit arithmetic.

A mode is a field that grows from the left half-space as exp(gamma x) and meets the right one as
exp(-gamma x). Its mismatch there, the dispersion function, is brought to zero by the secant method.
"""

from mpmath import cos, diff, findroot, mp, mpc, mpf, pi, sin, sqrt

DIGITS = 40


def _exact(value):
    value = complex(value)
    return mpc(mpf(value.real), mpf(value.imag))


def _decay(square):
    root = sqrt(square)
    return -root if root.real < 0 else root


def mismatch(n_eff, *, index, thickness_um, wavelength_nm, tm):
    """Zero where n_eff is that of a mode."""
    n_eff = mpc(n_eff)
    k0 = 2000 * pi / mpf(wavelength_nm)
    eps = [_exact(n) ** 2 for n in index]
    weight = [1 / e if tm else mpf(1) for e in eps]
    phi, flux = mpf(1), weight[0] * _decay(n_eff**2 - eps[0])
    for e, w, um in zip(eps[1:-1], weight[1:-1], thickness_um, strict=True):
        kappa = sqrt(e - n_eff**2)
        z = kappa * k0 * mpf(um)
        over = sin(z) / kappa
        phi, flux = (
            cos(z) * phi + over * flux / w,
            cos(z) * flux - kappa**2 * w * over * phi,
        )
    return flux + weight[-1] * _decay(n_eff**2 - eps[-1]) * phi


def effective_index(start, **guide):
    """The mode's n_eff next to ``start``, to 30 digits or more."""
    with mp.workdps(DIGITS):
        start = _exact(start)
        return findroot(
            lambda n: mismatch(n, **guide),
            (start, start + mpf(10) ** -9),
            solver="secant",
            tol=mpf(10) ** -60,
            maxsteps=60,
            verify=False,
        )


def newton_correction(n_eff, **guide):
    """What one step of Newton's method would still change: the residual in units of n_eff."""
    with mp.workdps(DIGITS):
        n = _exact(n_eff)
        return abs(mismatch(n, **guide) / diff(lambda x: mismatch(x, **guide), n))
