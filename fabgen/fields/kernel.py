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

Function = TypeVar("Function", bound=Callable[..., Any])



def _compiled(fastmath: bool) -> Callable[[Function], Function]:
    """Compile on the first call ever, keep the code for later runs, release the interpreter lock."""
    return cast(
        Callable[[Function], Function], njit(cache=True, nogil=True, fastmath=fastmath, error_model="numpy")
    )


@_compiled(fastmath=False)
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


@_compiled(fastmath=False)
def static_moments(first: int, last: int, test: Any, source: Any, corners: Any, images: Any, bary: Any, weight: Any,
                   area: Any, out: Any) -> None:
    """Averaged moments of 1/(4 pi R) for the near pairs first..last-1; corners (T, 3, 3), images likewise."""
    pot = np.empty(4)
    for n in range(first, last):
        p = test[n]
        q = source[n]
        for m in range(8):
            out[n, m] = 0.0
        for i in range(weight.shape[0]):
            x = y = z = 0.0
            for c in range(3):
                x += bary[i, c] * corners[p, c, 0]
                y += bary[i, c] * corners[p, c, 1]
                z += bary[i, c] * corners[p, c, 2]
            potential_integrals(x, y, z, images[q], pot)
            w = weight[i] / (area[q] * 12.566370614359172)
            out[n, 0] += w * pot[0]
            out[n, 1] += w * x * pot[0]
            out[n, 2] += w * y * pot[0]
            out[n, 3] += w * z * pot[0]
            out[n, 4] += w * pot[1]
            out[n, 5] += w * pot[2]
            out[n, 6] += w * pot[3]
            out[n, 7] += w * (x * pot[1] + y * pot[2] + z * pot[3])
        if p == q:
            for m in range(1, 4):
                mean = 0.5 * (out[n, m] + out[n, m + 3])
                out[n, m] = mean
                out[n, m + 3] = mean


@_compiled(fastmath=True)
def _scatter(p: int, q: int, m: Any, ka: complex, kb: complex, corners: Any, image: Any, length: Any, dof: Any,
             sign: Any, factor: float, z: Any) -> None:
    """Add the nine edge pairs of triangles p, q to the matrix. ``m``: the eight complex moments."""
    for a in range(3):
        if dof[p, a, 0] < 0:
            continue
        vax, vay, vaz = corners[p, a, 0], corners[p, a, 1], corners[p, a, 2]
        ma = vax * m[4] + vay * m[5] + vaz * m[6]
        for b in range(3):
            if dof[q, b, 0] < 0:
                continue
            vbx, vby, vbz = image[q, b, 0], image[q, b, 1], image[q, b, 2]
            vector = m[7] - ma - (vbx * m[1] + vby * m[2] + vbz * m[3]) + (vax * vbx + vay * vby + vaz * vbz) * m[0]
            value = factor * length[p, a] * length[q, b] * (ka * vector + kb * m[0])
            for s in range(2):
                row = dof[p, a, s]
                if row < 0:
                    break
                for t in range(2):
                    col = dof[q, b, t]
                    if col < 0:
                        break
                    add = value * (sign[p, a, s] * sign[q, b, t])
                    z[row, col] += add
                    if p != q:
                        z[col, row] += add


@_compiled(fastmath=True)
def far_rows(first: int, last: int, k: float, eta: float, kept: int, points: Any, image_points: Any, weight: Any,
             corners: Any, image: Any, length: Any, dof: Any, sign: Any, factor: float, near_start: Any,
             near_source: Any, z: Any) -> None:
    """Pairs (p, q >= p) that are not near, for test triangles first..last-1, by plain quadrature.

    points (T * n, 3) as separate rows of a (3, T * n) array; pairs with both triangles below ``kept`` are left out.
    """
    n = weight.shape[0]
    total = points.shape[1]
    triangles = total // n
    gr = np.empty(total)
    gi = np.empty(total)
    acc = np.zeros((triangles, 8, 2))
    m = np.empty(8, dtype=np.complex128)
    ka = 1j * k * eta / 4.0
    kb = eta / (1j * k)
    inv = 1.0 / (2.0 * math.pi)
    two_pi = 2.0 * math.pi
    for p in range(first, last):
        q0 = max(p, kept) if p < kept else p
        start = q0 * n
        for q in range(q0, triangles):
            for c in range(8):
                acc[q, c, 0] = 0.0
                acc[q, c, 1] = 0.0
        for i in range(n):
            x = points[0, p * n + i]
            y = points[1, p * n + i]
            zz = points[2, p * n + i]
            for s in range(start, total):
                dx = image_points[0, s] - x
                dy = image_points[1, s] - y
                dz = image_points[2, s] - zz
                r2 = dx * dx + dy * dy + dz * dz + 1e-300
                r = math.sqrt(r2)
                g = 0.07957747154594767 / r
                t = k * r
                t -= two_pi * np.int32(t * inv + 0.5)
                t *= 0.25
                t2 = t * t
                sn = t * (1.0 + t2 * (-1 / 6 + t2 * (1 / 120 + t2 * (-1 / 5040 + t2 * (1 / 362880 - t2 / 39916800)))))
                cs = 1.0 + t2 * (-0.5 + t2 * (1 / 24 + t2 * (-1 / 720 + t2 * (1 / 40320 - t2 / 3628800))))
                s2 = 2.0 * sn * cs
                c2 = 1.0 - 2.0 * sn * sn
                gr[s] = g * (1.0 - 2.0 * s2 * s2)
                gi[s] = -g * (2.0 * s2 * c2)
            wi = weight[i]
            for q in range(q0, triangles):
                s0r = s0i = sxr = sxi = syr = syi = szr = szi = 0.0
                for j in range(n):
                    s = q * n + j
                    a = gr[s] * weight[j]
                    b = gi[s] * weight[j]
                    s0r += a
                    s0i += b
                    sxr += a * image_points[0, s]
                    sxi += b * image_points[0, s]
                    syr += a * image_points[1, s]
                    syi += b * image_points[1, s]
                    szr += a * image_points[2, s]
                    szi += b * image_points[2, s]
                t = acc[q]
                t[0, 0] += wi * s0r
                t[0, 1] += wi * s0i
                t[1, 0] += wi * x * s0r
                t[1, 1] += wi * x * s0i
                t[2, 0] += wi * y * s0r
                t[2, 1] += wi * y * s0i
                t[3, 0] += wi * zz * s0r
                t[3, 1] += wi * zz * s0i
                t[4, 0] += wi * sxr
                t[4, 1] += wi * sxi
                t[5, 0] += wi * syr
                t[5, 1] += wi * syi
                t[6, 0] += wi * szr
                t[6, 1] += wi * szi
                t[7, 0] += wi * (x * sxr + y * syr + zz * szr)
                t[7, 1] += wi * (x * sxi + y * syi + zz * szi)
        pointer = near_start[p]
        stop = near_start[p + 1]
        for q in range(q0, triangles):
            while pointer < stop and near_source[pointer] < q:
                pointer += 1
            if pointer < stop and near_source[pointer] == q:
                continue
            for c in range(8):
                m[c] = complex(acc[q, c, 0], acc[q, c, 1])
            _scatter(p, q, m, ka, kb, corners, image, length, dof, sign, factor, z)


@_compiled(fastmath=False)
def near_rows(first: int, last: int, k: float, eta: float, kept: int, test: Any, source: Any, static: Any,
              points: Any, image_points: Any, weight: Any, corners: Any, image: Any, length: Any, dof: Any,
              sign: Any, factor: float, z: Any) -> None:
    """Near pairs first..last-1: static moments plus the smooth remainder of the kernel by quadrature."""
    n = weight.shape[0]
    m = np.empty(8, dtype=np.complex128)
    ka = 1j * k * eta / 4.0
    kb = eta / (1j * k)
    for pair in range(first, last):
        p = test[pair]
        q = source[pair]
        if p < kept and q < kept:
            continue
        for c in range(8):
            m[c] = static[pair, c]
        for i in range(n):
            x = points[0, p * n + i]
            y = points[1, p * n + i]
            zz = points[2, p * n + i]
            s0 = 0j
            sx = 0j
            sy = 0j
            sz = 0j
            for j in range(n):
                s = q * n + j
                dx = image_points[0, s] - x
                dy = image_points[1, s] - y
                dz = image_points[2, s] - zz
                t = k * math.sqrt(dx * dx + dy * dy + dz * dz)
                if t > 1e-3:
                    g = complex((math.cos(t) - 1.0) / t, -math.sin(t) / t)
                else:
                    g = complex(-0.5 * t, -1.0 + t * t / 6.0)
                g *= k * weight[j] * 0.07957747154594767
                s0 += g
                sx += g * image_points[0, s]
                sy += g * image_points[1, s]
                sz += g * image_points[2, s]
            w = weight[i]
            m[0] += w * s0
            m[1] += w * x * s0
            m[2] += w * y * s0
            m[3] += w * zz * s0
            m[4] += w * sx
            m[5] += w * sy
            m[6] += w * sz
            m[7] += w * (x * sx + y * sy + zz * sz)
        _scatter(p, q, m, ka, kb, corners, image, length, dof, sign, factor, z)


@_compiled(fastmath=True)
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
