"""The slow, obvious twin of the film kernels: characteristic matrices in 40-digit arithmetic."""

import cmath

from mpmath import cos, matrix, mp, mpc, mpf, pi, sin, sqrt

DIGITS = 40


def _exact(value):
    value = complex(value)
    return mpc(mpf(value.real), mpf(value.imag))


def _vertical(index, q):
    """kz / k0 on the branch Re + Im >= 0."""
    root = sqrt(index**2 - q**2)
    return -root if root.real + root.imag < 0 else root


def amplitudes(*, wavelength_nm, incident, outside, films, thickness_nm, q=0.0, tm=False):
    """r, t and T of one stack at one point; ``films`` holds the index of every layer."""
    # In a thick metal cos and sin are of the order exp(+b) and are then subtracted.
    roots = [cmath.sqrt(complex(n) ** 2 - complex(q) ** 2) for n in films]
    b = sum(abs(root.imag) * nm for root, nm in zip(roots, thickness_nm, strict=True))
    digits = DIGITS + int(2.0 * cmath.pi * b / wavelength_nm)
    with mp.workdps(digits):
        q = _exact(q)
        k0 = 2 * pi / mpf(wavelength_nm)

        def admittance(index):
            vertical = _vertical(index, q)
            return index**2 / vertical if tm else vertical

        total = matrix([[1, 0], [0, 1]])
        for film, nm in zip(films, thickness_nm, strict=True):
            n = _exact(film)
            kz = k0 * _vertical(n, q)
            delta = kz * mpf(nm)
            if kz == 0:
                over, times = k0 * mpf(nm), mpf(0)
            else:
                over, times = sin(delta) * k0 / kz, sin(delta) * kz / k0
            if tm:
                over, times = times / n**2, over * n**2
            total = total * matrix([[cos(delta), -1j * over], [-1j * times, cos(delta)]])
        eta_in, eta_out = admittance(_exact(incident)), admittance(_exact(outside))
        b = total[0, 0] + total[0, 1] * eta_out
        c = total[1, 0] + total[1, 1] * eta_out
        r = (eta_in * b - c) / (eta_in * b + c)
        t = 2 * eta_in / (eta_in * b + c)
        transmittance = eta_out.real / eta_in.real * abs(t) ** 2 if eta_in.real else mpf("nan")
        return complex(r), complex(t), float(transmittance), float(abs(r) ** 2)
