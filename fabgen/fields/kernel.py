"""Interaction integrals of pairs of triangles, compiled.

For triangles p (test) and q (source) eight averaged moments of a function g(R) are enough for all nine pairs of
edge functions:  m0 = <g>,  m1..3 = <r g>,  m4..6 = <r' g>,  m7 = <r . r' g>,  where < > is the mean over both
triangles. The free-space kernel is split as

    e^{-jkR}/(4 pi R) = 1/(4 pi R) + (e^{-jkR} - 1)/(4 pi R),

the first part integrated analytically over the source triangle for near pairs (Wilton et al., IEEE Trans. AP-32
(1984) 276-281; Graglia, IEEE Trans. AP-41 (1993) 1448-1455), the second by quadrature. The static part does not
depend on frequency and is computed once a mesh.

Compiled code releases the interpreter lock; the caller runs a fixed number of slices in threads, so results do
not depend on the number of cores.

Depends on: nothing.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar, cast

import numpy as np
from numba import njit

BLOCK = 128
"""Triangles that are computed together. What belongs to them lies in one flat buffer, a row of BLOCK numbers for each
quantity: with a single array and fixed offsets the compiler sees that no two rows overlap, and vectorises."""
PAIRS = 16
"""First row of the 18 edge pairs (source edge, test edge, real and imaginary part); the 16 moments come before."""
CORNERS = 34
"""First row of the source triangles: for each corner its place and the length of the edge across from it."""
POINT = 46
"""First row of one source point of each triangle."""
ROWS = 49
Function = TypeVar("Function", bound=Callable[..., Any])



def compiled(fastmath: bool) -> Callable[[Function], Function]:
    """Compile on the first call ever, keep the code for later runs, release the interpreter lock."""
    return cast(
        Callable[[Function], Function], njit(cache=True, nogil=True, fastmath=fastmath, error_model="numpy")
    )


@compiled(fastmath=False)
def potential_integrals(px: float, py: float, pz: float, v: Any, out: Any) -> None:
    """Analytic integrals over a triangle with vertices ``v`` (3, 3), seen from the point p.

    out[0] = int 1/R dS', out[1:4] = int r'/R dS'. Valid for any point, on the triangle included.
    """
    ax, ay, az = v[0, 0], v[0, 1], v[0, 2]
    e1x, e1y, e1z = v[1, 0] - ax, v[1, 1] - ay, v[1, 2] - az
    e2x, e2y, e2z = v[2, 0] - ax, v[2, 1] - ay, v[2, 2] - az
    nx, ny, nz = e1y * e2z - e1z * e2y, e1z * e2x - e1x * e2z, e1x * e2y - e1y * e2x
    norm = math.sqrt(nx * nx + ny * ny + nz * nz)
    nx, ny, nz = nx / norm, ny / norm, nz / norm
    d = (px - ax) * nx + (py - ay) * ny + (pz - az) * nz
    qx, qy, qz = px - d * nx, py - d * ny, pz - d * nz
    scale = norm
    i0 = 0.0
    sx = sy = sz = 0.0
    ad = abs(d)
    for i in range(3):
        j = (i + 1) % 3
        lx, ly, lz = v[j, 0] - v[i, 0], v[j, 1] - v[i, 1], v[j, 2] - v[i, 2]
        length = math.sqrt(lx * lx + ly * ly + lz * lz)
        lx, ly, lz = lx / length, ly / length, lz / length
        ux, uy, uz = ly * nz - lz * ny, lz * nx - lx * nz, lx * ny - ly * nx
        t0 = (v[i, 0] - qx) * ux + (v[i, 1] - qy) * uy + (v[i, 2] - qz) * uz
        lm = (v[i, 0] - qx) * lx + (v[i, 1] - qy) * ly + (v[i, 2] - qz) * lz
        lp = lm + length
        r02 = t0 * t0 + d * d
        rm = math.sqrt(r02 + lm * lm)
        rp = math.sqrt(r02 + lp * lp)
        f = 0.0
        if r02 > 1e-22 * scale:
            f = math.log((rp + lp) / (rm + lm)) if lm + lp >= 0.0 else math.log((rm - lm) / (rp - lp))
            i0 += t0 * f
            if ad > 0.0:
                i0 -= ad * (math.atan(t0 * lp / (r02 + ad * rp)) - math.atan(t0 * lm / (r02 + ad * rm)))
        g = 0.5 * (r02 * f + lp * rp - lm * rm)
        sx += ux * g
        sy += uy * g
        sz += uz * g
    out[0] = i0
    out[1] = sx + qx * i0
    out[2] = sy + qy * i0
    out[3] = sz + qz * i0


@compiled(fastmath=False)
def static_moments(first: int, last: int, test: Any, source: Any, corners: Any, images: Any, bary: Any, weight: Any,
                   area: Any, out: Any) -> None:
    """Averaged moments of 1/(4 pi R) for the near pairs first..last-1; corners (T, 3, 3), images likewise.

    The mean of both orders (outer quadrature on p, and on q), so that no numbering of triangles is favoured.
    """
    pot = np.empty(4)
    for n in range(first, last):
        p = test[n]
        q = source[n]
        for m in range(8):
            out[n, m] = 0.0
        for order in range(2):
            outer = corners[p] if order == 0 else images[q]
            inner = images[q] if order == 0 else corners[p]
            inner_area = area[q] if order == 0 else area[p]
            at_outer = 1 if order == 0 else 4
            at_inner = 4 if order == 0 else 1
            for i in range(weight.shape[0]):
                x = y = z = 0.0
                for c in range(3):
                    x += bary[i, c] * outer[c, 0]
                    y += bary[i, c] * outer[c, 1]
                    z += bary[i, c] * outer[c, 2]
                potential_integrals(x, y, z, inner, pot)
                w = 0.5 * weight[i] / (inner_area * 12.566370614359172)
                out[n, 0] += w * pot[0]
                out[n, at_outer] += w * x * pot[0]
                out[n, at_outer + 1] += w * y * pot[0]
                out[n, at_outer + 2] += w * z * pot[0]
                out[n, at_inner] += w * pot[1]
                out[n, at_inner + 1] += w * pot[2]
                out[n, at_inner + 2] += w * pot[3]
                out[n, 7] += w * (x * pot[1] + y * pot[2] + z * pot[3])


@compiled(fastmath=True)
def _edge_pairs(p: int, start: int, ka: float, kb: float, corners: Any, image: Any, length: Any, image_length: Any,
                factor: float, buffer: Any) -> None:
    """Nine edge pairs of triangle p with each of the triangles start..; the moments and the result lie in ``buffer``.

    ``image`` (3, 3, T + BLOCK): corner, axis. j ka multiplies the vector part, -j kb the charges. Pairs p < q stand
    for (q, p) too: the caller adds the transpose, so a triangle with itself counts half.
    """
    for b in range(3):
        for axis in range(3):
            _copy(image[b, axis], start, buffer, CORNERS + 4 * b + axis)
        _copy(image_length[b], start, buffer, CORNERS + 4 * b + 3)
    for a in range(3):
        ux, uy, uz = corners[p, a, 0], corners[p, a, 1], corners[p, a, 2]
        scale = factor * length[p, a]
        for b in range(3):
            out, at = (PAIRS + 6 * b + 2 * a) * BLOCK, (CORNERS + 4 * b) * BLOCK
            for t in range(BLOCK):
                vx, vy, vz = buffer[at + t], buffer[at + BLOCK + t], buffer[at + 2 * BLOCK + t]
                m0_re, m0_im = buffer[t], buffer[BLOCK + t]
                vector_re = buffer[14 * BLOCK + t] - (
                    vx * buffer[2 * BLOCK + t] + vy * buffer[4 * BLOCK + t] + vz * buffer[6 * BLOCK + t]
                ) - (ux * buffer[8 * BLOCK + t] + uy * buffer[10 * BLOCK + t] + uz * buffer[12 * BLOCK + t])
                vector_im = buffer[15 * BLOCK + t] - (
                    vx * buffer[3 * BLOCK + t] + vy * buffer[5 * BLOCK + t] + vz * buffer[7 * BLOCK + t]
                ) - (ux * buffer[9 * BLOCK + t] + uy * buffer[11 * BLOCK + t] + uz * buffer[13 * BLOCK + t])
                s = scale * buffer[at + 3 * BLOCK + t]
                charge = ka * (ux * vx + uy * vy + uz * vz) - kb
                buffer[out + t] = -s * (ka * vector_im + charge * m0_im)
                buffer[out + BLOCK + t] = s * (ka * vector_re + charge * m0_re)
    if start == p:
        for row in range(PAIRS, PAIRS + 18):
            buffer[row * BLOCK] *= 0.5


@compiled(fastmath=True)
def _scatter(start: int, count: int, buffer: Any, dof: Any, sign: Any, rows: Any) -> None:
    """Add the edge pairs to the columns of the three rows of one triangle, rows (3, N)."""
    for t in range(count):
        q = start + t
        for b in range(3):
            first = (PAIRS + 6 * b) * BLOCK + t
            for s in range(2):
                col = dof[q, b, s]
                if col >= 0:
                    f = sign[q, b, s]
                    for a in range(3):
                        at = first + 2 * a * BLOCK
                        rows[a, col] += complex(f * buffer[at], f * buffer[at + BLOCK])


@compiled(fastmath=True)
def _flush(p: int, rows: Any, dof: Any, sign: Any, place: Any, z: Any, extra: Any) -> None:
    """Add the rows of triangle p to the matrix, or to the slice's own copy of a shared row, and clear them."""
    for a in range(3):
        for s in range(2):
            row = dof[p, a, s]
            if row >= 0:
                f = sign[p, a, s]
                own = place[row]
                target = z[row] if own < 0 else extra[own]
                for c in range(rows.shape[1]):
                    target[c] += f * rows[a, c]
    for a in range(3):
        for c in range(rows.shape[1]):
            rows[a, c] = 0.0


@compiled(fastmath=True)
def _green(dx: float, dy: float, dz: float, w: float, k: float) -> tuple[float, float]:
    """w e^{-jkR}/(4 pi R), real and imaginary part.

    Sine and cosine by Taylor series at a quarter of the reduced angle and two doublings, exact to 1e-10; written
    out because the compiler turns this, and no call to a library, into vector instructions.
    """
    r = math.sqrt(dx * dx + dy * dy + dz * dz + 1e-300)
    a = k * r
    a -= 2.0 * math.pi * np.int32(a * (0.5 / math.pi) + 0.5)
    a *= 0.25
    a2 = a * a
    sn = a * (1.0 + a2 * (-1 / 6 + a2 * (1 / 120 + a2 * (-1 / 5040 + a2 * (1 / 362880 - a2 / 39916800)))))
    cs = 1.0 + a2 * (-0.5 + a2 * (1 / 24 + a2 * (-1 / 720 + a2 * (1 / 40320 - a2 / 3628800))))
    s2 = 2.0 * sn * cs
    c2 = 1.0 - 2.0 * sn * sn
    over = w * 0.07957747154594767 / r
    return over * (1.0 - 2.0 * s2 * s2), -over * (2.0 * s2 * c2)


@compiled(fastmath=True)
def _far_moments(p: int, start: int, k: float, points: Any, image_points: Any, weight: Any, buffer: Any) -> None:
    """Moments of triangle p with each of the triangles start.., all by plain quadrature, into ``buffer``.

    ``image_points`` (3, n, T + BLOCK).
    """
    n = weight.shape[0]
    for i in range(16 * BLOCK):
        buffer[i] = 0.0
    for j in range(n):
        for axis in range(3):
            _copy(image_points[axis, j], start, buffer, POINT + axis)
        for first in range(0, n, 3):
            _add_test_points(points[:, :, p], first, weight, weight[j], k, buffer)


@compiled(fastmath=True)
def _add_test_points(points: Any, first: int, weight: Any, source_weight: float, k: float, buffer: Any) -> None:
    """Add three test points' share, for one source point of each triangle, to the moments in ``buffer``.

    ``points`` (3, n). Three at a time leave most sums in registers; where fewer are left, the last ones weigh nothing.
    """
    last = weight.shape[0] - 1
    i, j = min(first + 1, last), min(first + 2, last)
    w0 = source_weight * weight[first]
    w1 = source_weight * weight[i] if i > first else 0.0
    w2 = source_weight * weight[j] if j > i else 0.0
    x0, y0, z0 = points[0, first], points[1, first], points[2, first]
    x1, y1, z1 = points[0, i], points[1, i], points[2, i]
    x2, y2, z2 = points[0, j], points[1, j], points[2, j]
    for t in range(BLOCK):
        px, py, pz = buffer[POINT * BLOCK + t], buffer[(POINT + 1) * BLOCK + t], buffer[(POINT + 2) * BLOCK + t]
        a_re, a_im = _green(px - x0, py - y0, pz - z0, w0, k)
        b_re, b_im = _green(px - x1, py - y1, pz - z1, w1, k)
        c_re, c_im = _green(px - x2, py - y2, pz - z2, w2, k)
        re, im = a_re + b_re + c_re, a_im + b_im + c_im
        x_re, x_im = a_re * x0 + b_re * x1 + c_re * x2, a_im * x0 + b_im * x1 + c_im * x2
        y_re, y_im = a_re * y0 + b_re * y1 + c_re * y2, a_im * y0 + b_im * y1 + c_im * y2
        z_re, z_im = a_re * z0 + b_re * z1 + c_re * z2, a_im * z0 + b_im * z1 + c_im * z2
        buffer[t] += re
        buffer[BLOCK + t] += im
        buffer[2 * BLOCK + t] += x_re
        buffer[3 * BLOCK + t] += x_im
        buffer[4 * BLOCK + t] += y_re
        buffer[5 * BLOCK + t] += y_im
        buffer[6 * BLOCK + t] += z_re
        buffer[7 * BLOCK + t] += z_im
        buffer[8 * BLOCK + t] += re * px
        buffer[9 * BLOCK + t] += im * px
        buffer[10 * BLOCK + t] += re * py
        buffer[11 * BLOCK + t] += im * py
        buffer[12 * BLOCK + t] += re * pz
        buffer[13 * BLOCK + t] += im * pz
        buffer[14 * BLOCK + t] += x_re * px + y_re * py + z_re * pz
        buffer[15 * BLOCK + t] += x_im * px + y_im * py + z_im * pz


@compiled(fastmath=True)
def _copy(values: Any, start: int, buffer: Any, row: int) -> None:
    for t in range(BLOCK):
        buffer[row * BLOCK + t] = values[start + t]


@compiled(fastmath=False)
def _near_moments(p: int, q: int, k: float, static: Any, points: Any, image_points: Any, weight: Any, buffer: Any,
                  t: int) -> None:
    """Moments of a near pair in column t of ``buffer``: static ones plus the smooth remainder by quadrature."""
    n = weight.shape[0]
    for c in range(8):
        buffer[2 * c * BLOCK + t] = static[c]
        buffer[(2 * c + 1) * BLOCK + t] = 0.0
    for i in range(n):
        x = points[0, i, p]
        y = points[1, i, p]
        z = points[2, i, p]
        for j in range(n):
            px = image_points[0, j, q]
            py = image_points[1, j, q]
            pz = image_points[2, j, q]
            kr = k * math.sqrt((px - x) ** 2 + (py - y) ** 2 + (pz - z) ** 2)
            w = k * weight[i] * weight[j] * 0.07957747154594767
            a = kr * kr
            if a < 1.0:
                # series of (cos kr - 1)/kr and sin kr/kr, exact to 1e-12 where kr < 1
                cosine = -kr * (1 / 2 - a * (1 / 24 - a * (1 / 720 - a * (1 / 40320 - a * (
                    1 / 3628800 - a * (1 / 479001600 - a / 87178291200))))))
                sine = 1.0 - a * (1 / 6 - a * (1 / 120 - a * (1 / 5040 - a * (1 / 362880 - a * (
                    1 / 39916800 - a / 6227020800)))))
            else:
                cosine = (math.cos(kr) - 1.0) / kr
                sine = math.sin(kr) / kr
            for part in range(2):
                v = w * cosine if part == 0 else -w * sine
                buffer[part * BLOCK + t] += v
                buffer[(2 + part) * BLOCK + t] += v * x
                buffer[(4 + part) * BLOCK + t] += v * y
                buffer[(6 + part) * BLOCK + t] += v * z
                buffer[(8 + part) * BLOCK + t] += v * px
                buffer[(10 + part) * BLOCK + t] += v * py
                buffer[(12 + part) * BLOCK + t] += v * pz
                buffer[(14 + part) * BLOCK + t] += v * (x * px + y * py + z * pz)


@compiled(fastmath=True)
def fill_rows(first: int, last: int, k: float, eta: float, kept: int, points: Any, image_points: Any, weight: Any,
              near_points: Any, near_image_points: Any, near_weight: Any, near_start: Any, near_source: Any,
              static: Any, corners: Any, images: Any, factors: Any, length: Any, image_length: Any, dof: Any,
              sign: Any, place: Any, z: Any, extra: Any) -> None:
    """Pairs (p, q >= p) for test triangles first..last-1 and every image: near ones with their static moments, the
    others by plain quadrature.

    ``points`` (3, n, T), ``image_points`` (I, 3, n, T + BLOCK), ``images`` (I, 3, 3, T + BLOCK): whole blocks are
    computed, the excess is dropped. Adds to z (N, N), and to extra for the rows that ``place`` (N,) sends there, the
    part whose transpose the caller adds; pairs with both triangles below ``kept`` are left out.
    """
    triangles = points.shape[2]
    buffer = np.zeros(ROWS * BLOCK)
    rows = np.zeros((3, z.shape[1]), dtype=np.complex128)
    for p in range(first, last):
        for image in range(images.shape[0]):
            pointer = near_start[image, p]
            stop = near_start[image, p + 1]
            for start in range(max(p, kept) if p < kept else p, triangles, BLOCK):
                count = min(BLOCK, triangles - start)
                _far_moments(p, start, k, points, image_points[image], weight, buffer)
                while pointer < stop and near_source[pointer] < start + count:
                    q = near_source[pointer]
                    _near_moments(p, q, k, static[pointer], near_points, near_image_points[image], near_weight,
                                  buffer, q - start)
                    pointer += 1
                _edge_pairs(p, start, k * eta / 4.0, eta / k, corners, images[image], length, image_length,
                            factors[image], buffer)
                _scatter(start, count, buffer, dof, sign, rows)
        _flush(p, rows, dof, sign, place, z, extra)


@compiled(fastmath=True)
def residual(matrix: Any, x: Any, v: Any, out: Any) -> float:
    """Fill out (N,) with v - Z x in one pass over Z (N, N); the largest of it over the largest |Z| |x| + |v|."""
    largest = 0.0
    scale = 0.0
    magnitude = np.abs(x)
    for m in range(matrix.shape[0]):
        re = v[m].real
        im = v[m].imag
        size = abs(v[m])
        for n in range(matrix.shape[1]):
            z_re, z_im = matrix[m, n].real, matrix[m, n].imag
            re -= z_re * x[n].real - z_im * x[n].imag
            im -= z_re * x[n].imag + z_im * x[n].real
            size += math.sqrt(z_re * z_re + z_im * z_im) * magnitude[n]
        out[m] = complex(re, im)
        largest = max(largest, re * re + im * im)
        scale = max(scale, size)
    return math.sqrt(largest) / scale


@compiled(fastmath=True)
def near_pairs(centre: Any, image_centre: Any, size: Any, reach: float, kept: int, start: Any, source: Any,
               count_only: bool) -> int:
    """List pairs (p, q >= p) whose centres are nearer than reach * (size_p + size_q) / 2, in order of p, q."""
    found = 0
    triangles = centre.shape[0]
    for p in range(triangles):
        start[p] = found
        q0 = max(p, kept) if p < kept else p
        for q in range(q0, triangles):
            dx = centre[p, 0] - image_centre[q, 0]
            dy = centre[p, 1] - image_centre[q, 1]
            dz = centre[p, 2] - image_centre[q, 2]
            limit = 0.5 * reach * (size[p] + size[q])
            if dx * dx + dy * dy + dz * dz < limit * limit:
                if not count_only:
                    source[found] = q
                found += 1
    start[triangles] = found
    return found


def is_compiled() -> bool:
    """Whether an earlier run left compiled code behind; if not, the first call takes some seconds more."""
    folder = Path(fill_rows.stats.cache_path)  # type: ignore[attr-defined]
    return any(folder.glob("kernel.fill_rows-*.nbi"))
