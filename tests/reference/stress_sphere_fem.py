"""Thermal stress in heated spheres and under heated patches: finite elements (scikit-fem) beside closed forms.

Linear thermoelasticity, biquadratic elements, 2 x 2 Gauss points for the stresses. Units: radius or patch half-width 1,
alpha E dT / (1 - nu) = 1 at the hottest point of the surface (so the closed forms read s(0) = 1); tension positive, x = depth.

Sphere: unknowns u_rho(rho, theta), u_theta(rho, theta) on the rectangle [0, 1] x [0, pi] in spherical coordinates, theta from
the axis of the cap, so the surface is exact. Strains: rr = u_rho', tt = (du_theta/dtheta + u_rho)/rho,
pp = (u_rho + u_theta cot theta)/rho, shear rt = (du_rho/dtheta)/rho + u_theta' - u_theta/rho; weight rho^2 sin theta.
Temperature p(x) w(theta): p = exp(-x/L) or erfc(x/L); w falls from 1 to 0 by a cubic (3 u^2 - 2 u^3) over theta_c - d .. theta_c + d,
theta_c = acos(1 - 2 f), d = N/s(0) in radians of the unit sphere (a heat front spreads sideways about as far as inwards).

Half-space patch: cylinder (disc) or plane strain (strip) of 40 half-widths, skin exp(-x/L), edge blurred over +- L.

Tables:
- sphere_profile.csv: radially symmetric temperature, s_r and s_t against the closed forms (Timoshenko & Goodier, recalled);
- cap_factor.csv: largest tension under the cap centre within a quarter radius, against closed form x c,
  c = 1 - .34 (1-f)(1 - exp(-(d/R)/.037)), alone and combined with a disc patch term; depth where the tension first reaches .9 of its maximum;
- patch.csv: disc and strip maxima against the point-solution forms, and those forms against quadrature of the point solutions.
Rows beyond the grid vary Poisson's ratio and the width of the cap's edge.
"""

import numpy as np
from scipy.integrate import quad
from scipy.interpolate import CubicSpline
from scipy.optimize import minimize_scalar
from scipy.sparse.linalg import splu
from scipy.special import erfc
from skfem import Basis, BilinearForm, ElementQuad2, ElementVector, LinearForm, MeshQuad, condense

from reference_csv import write_table

NU = 0.24
CENTRES_D = [0.01, 0.02, 0.05, 0.10, 0.14, 0.20, 0.30]
SHARES = [0.02, 0.05, 0.10, 0.15, 0.30, 0.60, 1.0]
QUARTER = 0.25
REFINED = {(0.01, 0.15, "exponential"), (0.05, 0.02, "exponential"), (0.05, 0.6, "exponential"), (0.14, 0.15, "erfc")}
VARIANTS = [(0.05, 0.3, 0.15, 1.0), (0.05, 0.3, 0.33, 1.0), (0.05, 0.15, NU, 0.5), (0.05, 0.15, NU, 2.0), (0.02, 0.05, NU, 2.0)]  # d, f, nu, edge/d
DISC_MAX = 3 * (2 / 3) / (5 / 3) ** 2.5  # of N/a, at z = a sqrt(2/3)


def march(start, stop, size):
    """Grid points from start to stop with local spacing size(x)."""
    points = [start]
    while points[-1] < stop:
        points.append(points[-1] + size(points[-1]))
    points = np.array(points)
    return start + (points - start) * (stop - start) / (points[-1] - start)


def profile(kind, d):
    """Depth profile with s(0) = 1 and integral d over a half-line."""
    length = d if kind == "exponential" else d * np.sqrt(np.pi)
    return (lambda x: np.exp(-x / length)) if kind == "exponential" else (lambda x: erfc(x / length))


def edge(angle, centre, width):
    """1 inside, 0 outside, cubic over centre +- width."""
    u = np.clip((centre + width - angle) / (2.0 * width), 0.0, 1.0)
    return u * u * (3.0 - 2.0 * u)


class Body:
    """Stiffness of a meshed body in one of three coordinate systems, factorised once."""

    def __init__(self, first, second, system, fixed, nu=NU):
        self.system, self.nu = system, nu
        young = 1.0 - nu  # alpha E/(1-nu) = 1 with alpha = 1
        self.lame, self.shear = young * nu / ((1 + nu) * (1 - 2 * nu)), young / (2 * (1 + nu))
        self.thermal = young / (1 - 2 * nu)
        mesh = MeshQuad.init_tensor(first, second)
        element = ElementVector(ElementQuad2())
        self.basis = Basis(mesh, element, intorder=6)
        self.gauss = Basis(mesh, element, intorder=3)
        x = self.basis.doflocs
        component = np.zeros(self.basis.N, dtype=int)
        for dofs in (self.basis.nodal_dofs, self.basis.facet_dofs, self.basis.interior_dofs):
            component[dofs[1]] = 1
        self.fixed = np.flatnonzero(fixed(x[0], x[1], component))
        self.stiffness = BilinearForm(lambda u, v, w: self.weight(w.x) * self.work(self.strain(u, w.x), self.strain(v, w.x)))
        matrix = self.stiffness.assemble(self.basis)
        self.free = np.setdiff1d(np.arange(self.basis.N), self.fixed)
        self.factor = splu(matrix[self.free][:, self.free].tocsc())

    def weight(self, x):
        return {"sphere": lambda: x[0] ** 2 * np.sin(x[1]), "cylinder": lambda: x[0], "plane": lambda: np.ones_like(x[0])}[self.system]()

    def strain(self, u, x):
        """Normal strains (first, second, out of plane) and the engineering shear."""
        v, g = (u.value, u.grad) if hasattr(u, "value") else (u[0], u[1])
        if self.system == "sphere":
            rho, theta = x[0], x[1]
            return (g[0][0], (g[1][1] + v[0]) / rho, (v[0] + v[1] * np.cos(theta) / np.sin(theta)) / rho,
                    g[0][1] / rho + g[1][0] - v[1] / rho)
        hoop = v[0] / x[0] if self.system == "cylinder" else 0.0 * v[0]
        return g[0][0], g[1][1], hoop, g[0][1] + g[1][0]

    def work(self, a, b):
        return (self.lame * (a[0] + a[1] + a[2]) * (b[0] + b[1] + b[2])
                + self.shear * (2 * (a[0] * b[0] + a[1] * b[1] + a[2] * b[2]) + a[3] * b[3]))

    def stresses(self, heat):
        """Coordinates of the Gauss points and the normal stresses there, for the temperature field heat(x, y)."""
        def push(v, w):
            e = self.strain(v, w.x)
            return self.weight(w.x) * self.thermal * heat(w.x[0], w.x[1]) * (e[0] + e[1] + e[2])

        load = LinearForm(push).assemble(self.basis)
        u = np.zeros(self.basis.N)
        u[self.free] = self.factor.solve(load[self.free])
        field = self.gauss.interpolate(u)
        x = np.asarray(self.gauss.global_coordinates())
        e = self.strain(field, x)
        trace = self.lame * (e[0] + e[1] + e[2]) - self.thermal * heat(x[0], x[1])
        return x, [trace + 2 * self.shear * e[i] for i in range(3)]


def sphere(d, theta_c, refine=1, nu=NU):
    size = lambda t: min(0.12, 0.25 * d + 0.25 * abs(t - theta_c), max(theta_c, 0.2) / 8.0) / refine
    angles = march(0.0, np.pi, size) if theta_c < np.pi else np.linspace(0.0, np.pi, 12 * refine + 1)
    depths = march(0.0, 1.0, lambda x: min(0.08, d / 5.0 + 0.22 * x) / refine)
    radii = np.sort(1.0 - depths)
    radii[0] = 0.0
    poles = lambda r, t, c: (c == 1) & ((t < 1e-12) | (t > np.pi - 1e-12))
    if theta_c < np.pi:  # one more condition stops the slide along the axis: the cold pole, or by symmetry the equator
        fixed = lambda r, t, c: poles(r, t, c) | ((c == 0) & (t > np.pi - 1e-12) & (r > 1 - 1e-12))
    else:
        fixed = lambda r, t, c: poles(r, t, c) | ((c == 1) & (abs(t - np.pi / 2) < 1e-9) & (r > 1 - 1e-12))
    return Body(radii, angles, "sphere", fixed, nu)


def along_axis(x, stress, along):
    """Stress by depth on the column of Gauss points nearest the axis; `along` maps the first or second coordinate to depth."""
    side, position = along(x)
    side, position, stress = side.ravel(), position.ravel(), stress.ravel()
    pick = side < side.min() * (1 + 1e-9) + 1e-15
    order = np.argsort(position[pick])
    return position[pick][order], stress[pick][order]


def closed_sphere(p, x):
    """s_r and s_t at depth x of the unit sphere with temperature p(depth), alpha E/(1-nu) = 1."""
    inner = lambda r: quad(lambda s: p(1.0 - s) * s * s, 0.0, r, epsabs=1e-13, epsrel=1e-11, limit=400,
                           points=[max(r - 0.05, r / 2)] if r > 0 else None)[0]
    whole = inner(1.0)
    r = 1.0 - x
    part = inner(r) / r**3
    return 2.0 * (whole - part), 2.0 * whole + part - p(x)


def peak(depth, stress, limit):
    keep = depth < limit
    depth, stress = np.append(depth[keep], limit), np.append(stress[keep], np.interp(limit, depth, stress))
    i = int(np.argmax(stress))
    j = int(np.argmax(stress >= 0.9 * stress[i]))
    if j == 0:
        return stress[i], depth[i], depth[0]
    share = (0.9 * stress[i] - stress[j - 1]) / (stress[j] - stress[j - 1])
    return stress[i], depth[i], depth[j - 1] + share * (depth[j] - depth[j - 1])


def profiles():
    rows = []
    shapes = [("uniform", lambda x: np.ones_like(x)), ("parabolic_hot_skin", lambda x: (1.0 - x) ** 2),
              ("parabolic_hot_core", lambda x: 1.0 - (1.0 - x) ** 2), ("erfc_d_0.05", profile("erfc", 0.05)), ("exponential_d_0.10", profile("exponential", 0.10))]
    body = sphere(0.05, np.pi, 2)
    for name, p in shapes:
        x, s = body.stresses(lambda r, t: p(1.0 - r))
        depth, radial = along_axis(x, s[0], lambda x: (x[1], 1.0 - x[0]))
        _, hoop = along_axis(x, s[1], lambda x: (x[1], 1.0 - x[0]))
        for wanted in [0.0, 0.01, 0.02, 0.05, 0.1, 0.2, 0.3, 0.5, 0.7, 0.9]:
            i = int(np.argmin(np.abs(depth - wanted)))
            r_exact, t_exact = closed_sphere(p, depth[i])
            rows.append((name, NU, depth[i], radial[i], r_exact, hoop[i], t_exact, max(abs(radial[i] - r_exact), abs(hoop[i] - t_exact))))
    write_table("sphere_profile.csv",
                "Radially symmetric temperature in the unit sphere; stresses in alpha E dT/(1-nu), tension positive, T = p(x/R).\n"
                "uniform: 1; parabolic_hot_skin: (r/R)^2; parabolic_hot_core: 1-(r/R)^2; erfc_d: erfc(x/(d sqrt pi)); exponential_d: exp(-x/d).",
                ["numpy", "scipy", "scikit-fem"],
                ["profile", "poisson", "depth_over_radius", "radial_fem", "radial_closed", "hoop_fem", "hoop_closed", "error_largest"], rows)
    return max(r[-1] for r in rows)


def closed_peak(kind, d):
    lattice = np.geomspace(1e-3, QUARTER, 60)
    p = profile(kind, d)
    return peak(lattice, np.array([closed_sphere(p, v)[0] for v in lattice]), QUARTER)


def fem_peak(body, kind, d, theta_c, edge_width):
    p = profile(kind, d)
    w = (lambda t: edge(t, theta_c, edge_width)) if theta_c < np.pi else (lambda t: np.ones_like(t))
    x, s = body.stresses(lambda r, t: p(1.0 - r) * w(t))
    return peak(*along_axis(x, s[0], lambda x: (x[1], 1.0 - x[0])), QUARTER)


def caps():
    rows, refined = [], 0.0
    closed = {(kind, d): closed_peak(kind, d) for kind in ("exponential", "erfc") for d in CENTRES_D}
    grid = [(d, f, NU, 1.0) for d in CENTRES_D for f in SHARES if d < np.arccos(1.0 - 2.0 * f)]  # else the blurred edge is all there is
    listed = grid + VARIANTS
    for d, f, nu, edge_in_d in listed:
        theta_c = float(np.arccos(1.0 - 2.0 * f))
        body = sphere(d, theta_c, 1, nu)
        for kind in ("exponential", "erfc"):
            largest, at, at90 = fem_peak(body, kind, d, theta_c, edge_in_d * d)
            change = None
            if (d, f, kind) in REFINED and (nu, edge_in_d) == (NU, 1.0):
                change = fem_peak(sphere(d, theta_c, 2, nu), kind, d, theta_c, d)[0] / largest - 1.0
                refined = max(refined, abs(change))
            top, _, top90 = closed[kind, d]
            factor = 1.0 - 0.34 * (1.0 - f) * (1.0 - np.exp(-d / 0.037))
            thin, thick = patch_terms("disc", kind, d, 2.0 * np.sqrt(f)) if f < 1 else (0.0, 0.0)
            off = lambda value: 100 * (value / largest - 1)
            rows.append((kind, d, f, nu, edge_in_d * d if f < 1 else None, largest, at if f < 1 else None, at90, top, top90, largest / top, factor,
                         top * factor, off(top * factor), thin, off(max(top * factor, thin)), off(top * factor + thin), thick,
                         off(max(top * factor, thick)), off(np.hypot(top * factor, thick)), None if change is None else 100 * change))
    write_table("cap_factor.csv",
                "Unit sphere heated on a cap of share f, skin thickness d = N/s(0); stresses in alpha E dT/(1-nu) of the cap centre, within a quarter radius.\n"
                "deviation_*_pct: proposed value over finite elements minus one. Patch terms: disc of equal area (a = 2 sqrt f), all force at the face (thin)\n"
                "or at its own depth (thick, see patch.csv). error_refined_change_pct: finite elements on half the spacing.",
                ["numpy", "scipy", "scikit-fem"],
                ["profile", "d_over_radius", "heated_share", "poisson", "edge_half_width_over_radius", "fem_max", "fem_max_depth", "fem_depth_90pct",
                 "closed_max", "closed_depth_90pct", "fem_over_closed", "factor_c", "closed_times_c", "deviation_c_pct", "disc_thin",
                 "deviation_larger_thin_pct", "deviation_sum_thin_pct", "disc_thick", "deviation_larger_thick_pct", "deviation_root_sum_squares_thick_pct",
                 "error_refined_change_pct"], rows)
    return rows, refined


def thick_kernel(shape, z, c):
    """Tension at depth z under a unit-force sheet buried at depth c, patch half-width 1 (see the patch table)."""
    near, far = 1 + (z - c) ** 2, 1 + (z + c) ** 2
    if shape == "disc":
        return -0.5 * (near**-1.5 - far**-1.5) + 3 * z * (z + c) / far**2.5
    return (-1 / near + 1 / far + 4 * z * (z + c) / far**2) / np.pi


def patch_terms(shape, kind, d, a):
    """Maximum tension under a patch of half-width a: all force at the face, and force at its own depth (skin d, s(0) = 1)."""
    p = profile(kind, d / a)
    tension = lambda z: quad(lambda c: p(c) * thick_kernel(shape, z, c), 0.0, 14.0 * d / a, epsabs=1e-11, limit=200)[0]
    best = minimize_scalar(lambda z: -tension(z), bounds=(0.3, 2.5), method="bounded", options={"xatol": 1e-8})
    return (DISC_MAX if shape == "disc" else 1 / np.pi) * d / a, -best.fun


def patches():
    rows = []
    span = 40.0
    for shape, system in (("disc", "cylinder"), ("strip", "plane")):
        for z in (0.3, 0.8165, 1.0, 2.0):
            if shape == "disc":  # Cerruti: unit tangential force along +x, s_zz at (-1, 0, z) is 3 z^2/(2 pi R^5)
                form = 3 * z**2 / (1 + z**2) ** 2.5
                direct = quad(lambda t: 3 * z**2 / (2 * np.pi * (1 + z**2) ** 2.5), 0, 2 * np.pi)[0]
            else:  # both edges, each the integral of Cerruti along its line
                form = 4 / np.pi * z**2 / (1 + z**2) ** 2
                direct = 2 * quad(lambda y: 3 * z**2 / (2 * np.pi * (1 + y**2 + z**2) ** 2.5), -np.inf, np.inf)[0]
            rows.append((shape, None, None, z, direct, form, None, None, None, None, None, None))
        for d in (0.02, 0.05, 0.1, 0.2, 0.4):
            horizontal = march(0.0, span, lambda r: 0.25 * d + 0.2 * abs(r - 1.0))
            vertical = march(0.0, span, lambda z: d / 5.0 + 0.15 * z)
            fixed = lambda r, z, c: ((c == 0) & (r < 1e-12)) | ((c == 1) & (z > span - 1e-9) & (r < 1e-12))
            body = Body(horizontal, vertical, system, fixed)
            for kind in ("exponential", "erfc"):
                p = profile(kind, d)
                x, s = body.stresses(lambda r, z: p(z) * edge(r, 1.0, min(d, 0.1)))
                depth, tension = along_axis(x, s[1], lambda x: (x[0], x[1]))
                fine = np.linspace(0.5, 2.5, 2001)
                spline = CubicSpline(depth, tension)(fine)
                top, at = spline.max() / d, fine[spline.argmax()]
                thin, thick = (v / d for v in patch_terms(shape, kind, d, 1.0))
                rows.append((shape, kind, d, None, None, None, top, at, thin, thick, 100 * (thin / top - 1), 100 * (thick / top - 1)))
    write_table("patch.csv",
                "Flat half-space heated over a disc of radius a or a strip of half-width a; lengths in a, stresses in N/a, N the skin force.\n"
                "Rows with a depth: point solutions by quadrature beside the closed form (all force at the face).\n"
                "Rows with a skin thickness d = N/s(0): finite elements (domain 40 a, edge blurred over +- the smaller of d and .1 a), the closed\n"
                "form with all force at the face (thin), and the integral over depth c of s(c) times the tension of a heated sheet at c (thick):\n"
                "disc: -(1/2)[(1+(z-c)^2)^-1.5 - (1+(z+c)^2)^-1.5] + 3 z (z+c) (1+(z+c)^2)^-2.5;\n"
                "strip: (1/pi)[-1/(1+(z-c)^2) + 1/(1+(z+c)^2) + 4 z (z+c)/(1+(z+c)^2)^2] (from nuclei of strain in a half-space, derived).",
                ["numpy", "scipy", "scikit-fem"],
                ["patch", "profile", "skin_over_half_width", "depth", "point_solutions", "closed_form", "fem_max", "fem_max_depth", "thin_max", "thick_max",
                 "deviation_thin_pct", "deviation_thick_pct"], rows)
    return rows


def main():
    worst = profiles()
    print("sphere profiles, largest difference", worst)
    rows, refined = caps()
    print("caps, largest change by refining", refined)
    for kind in ("exponential", "erfc"):
        for title, column in (("c", 13), ("larger of c and thin disc", 15), ("larger of c and thick disc", 18), ("root sum of squares, thick", 19)):
            print(f"{kind}, {title}: % over finite elements, columns f {SHARES}")
            for d in CENTRES_D:
                print(f"  d/R {d:5.2f}", *(f"{r[column]:7.1f}" for r in rows if r[:2] == (kind, d) and r[3] == NU and r[4] in (d, None)))
    for r in rows[-2 * len(VARIANTS):]:
        print("variant", *(f"{v:.3f}" if isinstance(v, float) else v for v in r[:16]))
    for r in patches():
        print(*(f"{v:.4f}" if isinstance(v, float) else v for v in r if v is not None))
    assert worst < 2e-3 and refined < 0.01


if __name__ == "__main__":
    main()
