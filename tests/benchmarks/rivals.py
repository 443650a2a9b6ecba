"""What the kernels are timed against: plain numpy, and the same recurrence in C."""

import ctypes
import shutil
import subprocess

import numpy as np


def numpy_reflection(wavelength_nm, incident, outside, films, thickness_nm, film):
    """Complex r (S, P) at normal incidence: whole batch at once, one pass a layer.

    One exponential a layer serves cosine and sine; arrays are reused in place.
    """
    scale = 2j * np.pi * films / wavelength_nm
    field_b = np.ones((len(thickness_nm), wavelength_nm.size), complex)
    field_c = np.broadcast_to(outside, field_b.shape).astype(complex)
    for layer in range(thickness_nm.shape[1] - 1, -1, -1):
        index = films[film[layer]]
        forth = np.exp(thickness_nm[:, layer, None] * scale[film[layer]])
        back = 1.0 / forth
        cos = forth + back
        cos *= 0.5
        sin = np.subtract(back, forth, out=back)  # -i sin delta, twice
        sin *= 0.5
        field_b, field_c = (
            cos * field_b + sin / index * field_c,
            sin * index * field_b + cos * field_c,
        )
    field_b *= incident
    return (field_b - field_c) / (field_b + field_c)


def numpy_in_pieces(wavelength_nm, incident, outside, films, thickness_nm, film, stacks=40):
    """`numpy_reflection` on so few stacks at a time that its arrays stay in the cache."""
    return np.concatenate(
        [
            numpy_reflection(
                wavelength_nm, incident, outside, films, thickness_nm[at : at + stacks], film
            )
            for at in range(0, len(thickness_nm), stacks)
        ]
    )


C_SOURCE = r"""
#include <math.h>
#include <stddef.h>
#define BLOCK 64
/* r of every stack at every point, normal incidence, complex films, real half-spaces */
void reflect(size_t stacks, size_t layers, size_t points, const double *thickness,
             const long *film, const double *k_re, const double *k_im, const double *n_re,
             const double *n_im, double n_in, double n_out, double *r)
{
    for (size_t p0 = 0; p0 < points; p0 += BLOCK) {
        size_t n = points - p0 < BLOCK ? points - p0 : BLOCK;
        double yr[8][BLOCK], yi[8][BLOCK];
        for (size_t m = 0; m < 2; m++)
            for (size_t i = 0; i < n; i++) {
                double er = n_re[m * points + p0 + i], ei = n_im[m * points + p0 + i];
                yr[m][i] = er / (er * er + ei * ei);
                yi[m][i] = -ei / (er * er + ei * ei);
            }
        for (size_t s = 0; s < stacks; s++) {
            double br[BLOCK], bi[BLOCK], cr[BLOCK], ci[BLOCK];
            double si[BLOCK], co[BLOCK], ex[BLOCK];
            for (size_t i = 0; i < n; i++) { br[i] = 1; bi[i] = 0; cr[i] = n_out; ci[i] = 0; }
            for (size_t j = layers; j-- > 0;) {
                size_t m = film[j];
                const double *restrict kr = k_re + m * points + p0;
                const double *restrict ki = k_im + m * points + p0;
                const double *restrict er = n_re + m * points + p0;
                const double *restrict ei = n_im + m * points + p0;
                double d = thickness[s * layers + j];
                for (size_t i = 0; i < n; i++) si[i] = sin(kr[i] * d);
                for (size_t i = 0; i < n; i++) co[i] = cos(kr[i] * d);
                for (size_t i = 0; i < n; i++) ex[i] = exp(-2.0 * ki[i] * d);
                for (size_t i = 0; i < n; i++) {
                    double g = 0.5 + 0.5 * ex[i], h = 0.5 - 0.5 * ex[i];
                    double c_r = g * co[i], c_i = -h * si[i], s_r = g * si[i], s_i = h * co[i];
                    double ar = s_r * ei[i] + s_i * er[i], ai = s_i * ei[i] - s_r * er[i];
                    double zr = s_r * yi[m][i] + s_i * yr[m][i];
                    double zi = s_i * yi[m][i] - s_r * yr[m][i];
                    double b_r = br[i], b_i = bi[i], d_r = cr[i], d_i = ci[i];
                    br[i] = c_r * b_r - c_i * b_i + zr * d_r - zi * d_i;
                    bi[i] = c_r * b_i + c_i * b_r + zr * d_i + zi * d_r;
                    cr[i] = c_r * d_r - c_i * d_i + ar * b_r - ai * b_i;
                    ci[i] = c_r * d_i + c_i * d_r + ar * b_i + ai * b_r;
                }
            }
            double *out = r + 2 * (s * points + p0);
            for (size_t i = 0; i < n; i++) {
                double dr = n_in * br[i] + cr[i], di = n_in * bi[i] + ci[i];
                double ur = n_in * br[i] - cr[i], ui = n_in * bi[i] - ci[i];
                double size = dr * dr + di * di;
                out[2 * i] = (ur * dr + ui * di) / size;
                out[2 * i + 1] = (ui * dr - ur * di) / size;
            }
        }
    }
}
"""


def c_reflection(folder):
    """The C rival as a function like `numpy_reflection`, or None without a compiler."""
    gcc = shutil.which("gcc")
    if gcc is None:
        return None
    source, library = folder / "rival.c", folder / "rival.so"
    source.write_text(C_SOURCE)
    # Linked apart: with -ffast-math the linker adds code that switches subnormal numbers off for good,
    # in this whole process.
    part = folder / "rival.o"
    fast = ["-O3", "-march=native", "-ffast-math", "-fPIC", "-c"]
    subprocess.run([gcc, *fast, str(source), "-o", str(part)], check=True)
    subprocess.run([gcc, "-shared", str(part), "-o", str(library), "-lm"], check=True)
    reflect = ctypes.CDLL(str(library)).reflect
    reals = np.ctypeslib.ndpointer(np.float64, flags="C")
    whole = np.ctypeslib.ndpointer(np.int64, flags="C")
    size, real = ctypes.c_size_t, ctypes.c_double
    reflect.argtypes = [size] * 3 + [reals, whole] + [reals] * 4 + [real] * 2 + [reals]
    reflect.restype = None

    def run(wavelength_nm, incident, outside, films, thickness_nm, film):
        vertical = 2.0 * np.pi * films / wavelength_nm
        r = np.empty((len(thickness_nm), wavelength_nm.size), complex)
        planes = [np.ascontiguousarray(a) for a in (vertical.real, vertical.imag)]
        planes += [np.ascontiguousarray(a) for a in (films.real, films.imag)]
        sizes = (*thickness_nm.shape, wavelength_nm.size)
        reflect(*sizes, thickness_nm, film, *planes, incident, outside, r.view(float))
        return r

    return run
