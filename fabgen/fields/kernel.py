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
def _edge_pairs(p: int, start: int, count: int, m: Any, ka: float, kb: float, corners: Any, image: Any, length: Any,
                image_length: Any, factor: float, work: Any, pairs: Any) -> None:
    """Nine edge pairs of triangle p with each of the triangles start..: pairs (3, 3, 2, B): source edge, test edge,
    real and imaginary part.

    ``m`` (16, B): real and imaginary parts of the moments; ``image`` (3, 3, T): corner, axis. j ka multiplies the
    vector part, -j kb the charges. Pairs p < q stand for (q, p) too: the caller adds the transpose, so a triangle
    with itself counts half. ``work`` (4, 2, B) is scratch.
    """
    for a in range(3):
        ux, uy, uz = corners[p, a, 0], corners[p, a, 1], corners[p, a, 2]
        for part in range(2):
            for t in range(count):
                work[a, part, t] = ux * m[8 + part, t] + uy * m[10 + part, t] + uz * m[12 + part, t]
    for b in range(3):
        for part in range(2):
            for t in range(count):
                q = start + t
                work[3, part, t] = m[14 + part, t] - (
                    image[b, 0, q] * m[2 + part, t] + image[b, 1, q] * m[4 + part, t] + image[b, 2, q] * m[6 + part, t]
                )
        for a in range(3):
            ux, uy, uz = corners[p, a, 0], corners[p, a, 1], corners[p, a, 2]
            scale = factor * length[p, a]
            for t in range(count):
                q = start + t
                s = scale * image_length[b, q]
                charge = ka * (ux * image[b, 0, q] + uy * image[b, 1, q] + uz * image[b, 2, q]) - kb
                pairs[b, a, 0, t] = -s * (ka * (work[3, 1, t] - work[a, 1, t]) + charge * m[1, t])
                pairs[b, a, 1, t] = s * (ka * (work[3, 0, t] - work[a, 0, t]) + charge * m[0, t])
    if start == p:
        for b in range(3):
            for a in range(3):
                pairs[b, a, 0, 0] *= 0.5
                pairs[b, a, 1, 0] *= 0.5


@compiled(fastmath=True)
def _scatter(start: int, count: int, pairs: Any, dof: Any, sign: Any, rows: Any) -> None:
    """Add the edge pairs to the columns of the three rows of one triangle, rows (3, N)."""
    for t in range(count):
        q = start + t
        for b in range(3):
            for s in range(2):
                col = dof[q, b, s]
                if col >= 0:
                    f = sign[q, b, s]
                    for a in range(3):
                        rows[a, col] += complex(f * pairs[b, a, 0, t], f * pairs[b, a, 1, t])


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
        for c in range(rows.shape[1]):
            rows[a, c] = 0.0


@compiled(fastmath=True)
def _kernel_values(x: float, y: float, z: float, k: float, points: Any, j: int, first: int, count: int,
                   g: Any) -> None:
    """e^{-jkR}/(4 pi R) from (x, y, z) to point j of triangles first..: real and imaginary part in g[2 j], g[2 j + 1].

    Sine and cosine by Taylor series at a quarter of the reduced angle and two doublings, exact to 1e-10; written
    out because the compiler turns this loop, and no call to a library, into vector instructions.
    """
    two_pi = 2.0 * math.pi
    inverse = 1.0 / two_pi
    for t in range(count):
        dx = points[0, j, first + t] - x
        dy = points[1, j, first + t] - y
        dz = points[2, j, first + t] - z
        r = math.sqrt(dx * dx + dy * dy + dz * dz + 1e-300)
        a = k * r
        a -= two_pi * np.int32(a * inverse + 0.5)
        a *= 0.25
        a2 = a * a
        sn = a * (1.0 + a2 * (-1 / 6 + a2 * (1 / 120 + a2 * (-1 / 5040 + a2 * (1 / 362880 - a2 / 39916800)))))
        cs = 1.0 + a2 * (-0.5 + a2 * (1 / 24 + a2 * (-1 / 720 + a2 * (1 / 40320 - a2 / 3628800))))
        s2 = 2.0 * sn * cs
        c2 = 1.0 - 2.0 * sn * sn
        over = 0.07957747154594767 / r
        g[2 * j, t] = over * (1.0 - 2.0 * s2 * s2)
        g[2 * j + 1, t] = -over * (2.0 * s2 * c2)


@compiled(fastmath=True)
def _add_moments(x: float, y: float, z: float, w: float, weight: Any, points: Any, first: int, count: int, g: Any,
                 m: Any) -> None:
    """Add one test point's share to the moments m (16, B) of triangles first..; g holds the kernel values."""
    n = weight.shape[0]
    for part in range(2):
        for j in range(n):
            wj = w * weight[j]
            row = 2 * j + part
            for t in range(count):
                v = wj * g[row, t]
                px = points[0, j, first + t]
                py = points[1, j, first + t]
                pz = points[2, j, first + t]
                m[part, t] += v
                m[2 + part, t] += v * x
                m[4 + part, t] += v * y
                m[6 + part, t] += v * z
                m[8 + part, t] += v * px
                m[10 + part, t] += v * py
                m[12 + part, t] += v * pz
                m[14 + part, t] += v * (x * px + y * py + z * pz)


@compiled(fastmath=False)
def _near_moments(p: int, q: int, k: float, static: Any, points: Any, image_points: Any, weight: Any, m: Any,
                  t: int) -> None:
    """Moments of a near pair in column t of m: static ones plus the smooth remainder by quadrature."""
    n = weight.shape[0]
    for c in range(8):
        m[2 * c, t] = static[c]
        m[2 * c + 1, t] = 0.0
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
                m[part, t] += v
                m[2 + part, t] += v * x
                m[4 + part, t] += v * y
                m[6 + part, t] += v * z
                m[8 + part, t] += v * px
                m[10 + part, t] += v * py
                m[12 + part, t] += v * pz
                m[14 + part, t] += v * (x * px + y * py + z * pz)


@compiled(fastmath=True)
def fill_rows(first: int, last: int, k: float, eta: float, kept: int, points: Any, image_points: Any, weight: Any,
              near_points: Any, near_image_points: Any, near_weight: Any, near_start: Any, near_source: Any,
              static: Any, corners: Any, images: Any, factors: Any, length: Any, image_length: Any, dof: Any,
              sign: Any, place: Any, z: Any, extra: Any) -> None:
    """Pairs (p, q >= p) for test triangles first..last-1 and every image: near ones with their static moments, the
    others by plain quadrature.

    ``points`` (3, n, T), ``image_points`` (I, 3, n, T), ``images`` (I, 3, 3, T). Adds to z (N, N), and to extra for
    the rows that ``place`` (N,) sends there, the part whose transpose the caller adds; pairs with both triangles
    below ``kept`` are left out.
    """
    n = weight.shape[0]
    triangles = points.shape[2]
    g = np.empty((2 * n, BLOCK))
    m = np.empty((16, BLOCK))
    work = np.empty((4, 2, BLOCK))
    pairs = np.empty((3, 3, 2, BLOCK))
    rows = np.zeros((3, z.shape[1]), dtype=np.complex128)
    for p in range(first, last):
        for image in range(images.shape[0]):
            pointer = near_start[image, p]
            stop = near_start[image, p + 1]
            for start in range(max(p, kept) if p < kept else p, triangles, BLOCK):
                count = min(BLOCK, triangles - start)
                m[:, :] = 0.0
                for i in range(n):
                    x = points[0, i, p]
                    y = points[1, i, p]
                    zz = points[2, i, p]
                    for j in range(n):
                        _kernel_values(x, y, zz, k, image_points[image], j, start, count, g)
                    _add_moments(x, y, zz, weight[i], weight, image_points[image], start, count, g, m)
                while pointer < stop and near_source[pointer] < start + count:
                    q = near_source[pointer]
                    _near_moments(p, q, k, static[pointer], near_points, near_image_points[image], near_weight, m,
                                  q - start)
                    pointer += 1
                _edge_pairs(p, start, count, m, k * eta / 4.0, eta / k, corners, images[image], length, image_length,
                            factors[image], work, pairs)
                _scatter(start, count, pairs, dof, sign, rows)
        _flush(p, rows, dof, sign, place, z, extra)


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
