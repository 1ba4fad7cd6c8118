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
def _scatter(p: int, q: int, m: Any, t: int, ka: complex, kb: complex, corners: Any, image: Any, length: Any,
             dof: Any, sign: Any, factor: float, rows: Any) -> None:
    """Add the nine edge pairs of triangles p, q to the three rows of p.

    ``m`` (16, B): real and imaginary parts of the eight moments in column ``t``. Pairs p < q stand for (q, p) too:
    the caller adds the transpose, so a triangle with itself counts half.
    """
    half = 0.5 * factor if p == q else factor
    m0 = complex(m[0, t], m[1, t])
    ax, ay, az = complex(m[2, t], m[3, t]), complex(m[4, t], m[5, t]), complex(m[6, t], m[7, t])
    bx, by, bz = complex(m[8, t], m[9, t]), complex(m[10, t], m[11, t]), complex(m[12, t], m[13, t])
    dot = complex(m[14, t], m[15, t])
    charge = kb * m0
    for b in range(3):
        col = dof[q, b, 0]
        if col < 0:
            continue
        vx, vy, vz = image[q, b, 0], image[q, b, 1], image[q, b, 2]
        mb = dot - (vx * ax + vy * ay + vz * az)
        scale = half * length[q, b]
        for a in range(3):
            if dof[p, a, 0] < 0:
                continue
            ux, uy, uz = corners[p, a, 0], corners[p, a, 1], corners[p, a, 2]
            vector = mb - (ux * bx + uy * by + uz * bz) + (ux * vx + uy * vy + uz * vz) * m0
            value = (scale * length[p, a]) * (ka * vector + charge)
            rows[a, col] += value * sign[q, b, 0]
            second = dof[q, b, 1]
            if second >= 0:
                rows[a, second] += value * sign[q, b, 1]


@compiled(fastmath=True)
def _flush(p: int, rows: Any, dof: Any, sign: Any, z: Any) -> None:
    """Add the rows of triangle p to the matrix and clear them."""
    for a in range(3):
        for s in range(2):
            row = dof[p, a, s]
            if row >= 0:
                f = sign[p, a, s]
                for c in range(rows.shape[1]):
                    z[row, c] += f * rows[a, c]
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


@compiled(fastmath=True)
def far_rows(first: int, last: int, k: float, eta: float, kept: int, points: Any, image_points: Any, weight: Any,
             corners: Any, image: Any, length: Any, dof: Any, sign: Any, factor: float, near_start: Any,
             near_source: Any, z: Any) -> None:
    """Pairs (p, q >= p) that are not near, for test triangles first..last-1, by plain quadrature.

    ``points`` (3, n, T). Adds to z (N, N) the part whose transpose the caller adds; pairs with both triangles
    below ``kept`` are left out.
    """
    n = weight.shape[0]
    triangles = points.shape[2]
    g = np.empty((2 * n, BLOCK))
    m = np.empty((16, BLOCK))
    rows = np.zeros((3, z.shape[1]), dtype=np.complex128)
    ka = 1j * k * eta / 4.0
    kb = eta / (1j * k)
    for p in range(first, last):
        pointer = near_start[p]
        stop = near_start[p + 1]
        for start in range(max(p, kept) if p < kept else p, triangles, BLOCK):
            count = min(BLOCK, triangles - start)
            m[:, :] = 0.0
            for i in range(n):
                x = points[0, i, p]
                y = points[1, i, p]
                zz = points[2, i, p]
                for j in range(n):
                    _kernel_values(x, y, zz, k, image_points, j, start, count, g)
                _add_moments(x, y, zz, weight[i], weight, image_points, start, count, g, m)
            for t in range(count):
                q = start + t
                while pointer < stop and near_source[pointer] < q:
                    pointer += 1
                if pointer < stop and near_source[pointer] == q:
                    continue
                _scatter(p, q, m, t, ka, kb, corners, image, length, dof, sign, factor, rows)
        _flush(p, rows, dof, sign, z)


@compiled(fastmath=False)
def near_rows(first: int, last: int, k: float, eta: float, kept: int, test: Any, source: Any, static: Any,
              points: Any, image_points: Any, weight: Any, corners: Any, image: Any, length: Any, dof: Any,
              sign: Any, factor: float, z: Any) -> None:
    """Near pairs first..last-1 (in order of p): static moments plus the smooth remainder by quadrature."""
    n = weight.shape[0]
    m = np.empty((16, 1))
    rows = np.zeros((3, z.shape[1]), dtype=np.complex128)
    ka = 1j * k * eta / 4.0
    kb = eta / (1j * k)
    before = -1
    for pair in range(first, last):
        p = test[pair]
        q = source[pair]
        if p < kept and q < kept:
            continue
        if p != before and before >= 0:
            _flush(before, rows, dof, sign, z)
        before = p
        for c in range(8):
            m[2 * c, 0] = static[pair, c]
            m[2 * c + 1, 0] = 0.0
        for i in range(n):
            x = points[0, i, p]
            y = points[1, i, p]
            zz = points[2, i, p]
            for j in range(n):
                px = image_points[0, j, q]
                py = image_points[1, j, q]
                pz = image_points[2, j, q]
                t = k * math.sqrt((px - x) ** 2 + (py - y) ** 2 + (pz - zz) ** 2)
                w = k * weight[i] * weight[j] * 0.07957747154594767
                for part in range(2):
                    if part == 0:
                        v = w * ((math.cos(t) - 1.0) / t if t > 1e-3 else -0.5 * t)
                    else:
                        v = w * (-math.sin(t) / t if t > 1e-3 else t * t / 6.0 - 1.0)
                    m[part, 0] += v
                    m[2 + part, 0] += v * x
                    m[4 + part, 0] += v * y
                    m[6 + part, 0] += v * zz
                    m[8 + part, 0] += v * px
                    m[10 + part, 0] += v * py
                    m[12 + part, 0] += v * pz
                    m[14 + part, 0] += v * (x * px + y * py + zz * pz)
        _scatter(p, q, m, 0, ka, kb, corners, image, length, dof, sign, factor, rows)
    if before >= 0:
        _flush(before, rows, dof, sign, z)


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
