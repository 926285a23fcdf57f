"""The five demo jobs, computed a second time from the defining integrals and equations, by none of our geometry.

The first computation goes through Chebyshev series; this one goes by Gauss–Legendre quadrature and root finding at 22
digits (mpmath), from what the job states. The equations are those of the method, written down again (derived, nothing
published): arc length ``∫ √(1 + z'²) dr``; the law of the focal length as the paraboloid of another focal length at
equal arc length; the law of curvature as ``ψ = ∫ κ ds, r = ∫ cos ψ ds, z = ∫ sin ψ ds``; the sheet along the normal;
straight vacuum from its own ``d(ln t)/dr``; shrinkage as a scale.

A point of the sheet is named by its radius on the released face. `EXACT` is the tolerance of all that is quadrature on
both sides: 1e-9 of the value or 1e-9 mm, which leaves a thousandfold over rounding. Wider ones are explained in place.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, cached_property
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from mpmath import mp
from mpmath.calculus.quadrature import GaussLegendre
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline
from scipy.optimize import linprog

from fabricate import part_report
from fabricate.blank import blank_of
from fabricate.chain import Chain
from fabricate.hoop_strain import hoop_strain
from fabricate.job import read_job
from fabricate.job_keys import Job
from fabricate.predicted import Sensitivity, exact_part, predicted_part, sensitivities
from fabricate.rim import rim_of
from fabricate.springback import percent_of
from profiles.arcpath import ArcPath
from profiles.best_parabola import BestParabola, best_parabola

DEMO = Path(part_report.__file__).parent / "demo"
NAMES = ("display-bowl", "lamp", "link-dish", "listening-dish", "terrace-heater")
DIGITS = 22
DEGREE = 4
"""24 nodes: the nearest singularity of these integrands leaves 1e-20 and less (see the test of the arc length)."""
EXACT = 1e-9
SAMPLES, DENSE, ROUNDS = 41, 1001, 4
DEPARTURE, FOCUS = 2e-3, 1e-4
"""Of the departure itself, and millimetres: `best_parabola` takes distances along the axis times the cosine of the
curve's slope, here they are normal. Where curve and parabola lean apart by 2 mrad, on a wall of 50 degrees, that is two
thousandths of the distance; the lamp's 0.014 mm over its 60 mm then move its focal length by 5e-5 mm."""

Number = Any
"""A number of mpmath, which has no types."""
Array = NDArray[np.float64]
Place = tuple[Number, Number, Number]
"""Radius, height and slope of a face."""
Face = Callable[[Number], tuple[Number, ...]]
"""Where the points of the sheet lie."""


@cache
def _sensitivities(name: str) -> tuple[Sensitivity, ...]:
    return sensitivities(_chain(name))


@cache
def _chain(name: str) -> Chain:
    return Chain(read_job(DEMO / f"{name}.toml").in_millimetres())


def _integral(function: Callable[[Number], Number], start: Number, end: Number) -> Number:
    half, middle = (end - start) / mp.mpf(2), (end + start) / mp.mpf(2)
    return half * mp.fsum(weight * function(middle + half * node) for node, weight in _rule())


@cache
def _rule() -> tuple[tuple[Number, Number], ...]:
    return tuple(GaussLegendre(mp).calc_nodes(DEGREE, mp.prec))


def _stretch(radius: Number, focal: Number) -> Number:
    """Return ``√(1 + z'²)`` of the paraboloid ``z = r²/4f``."""
    return mp.sqrt(1 + (radius / (2 * focal)) ** 2)


def _arc_length(radius: Number, focal: Number) -> Number:
    return _integral(lambda at: _stretch(at, focal), 0, radius)


def _radius_at(length: Number, focal: Number, near: Number) -> Number:
    return mp.findroot(lambda radius: _arc_length(radius, focal) - length, near) if length else mp.mpf(0)


def _slope(radius: Number, focal: Number) -> Number:
    return mp.atan(radius / (2 * focal))


def _paraboloid(radius: Number, focal: Number) -> Place:
    return radius, radius**2 / (4 * focal), _slope(radius, focal)


@dataclass(frozen=True, eq=False)
class Second:
    """A job computed a second time; all its faces are paraboloids, so are those of the law of the focal length."""

    job: Job

    @cached_property
    def focal(self) -> Number:
        return mp.mpf(self.job.reflector.focal_length)

    @cached_property
    def rim(self) -> Number:
        return mp.mpf(self.job.reflector.rim_diameter) / 2

    @cached_property
    def end(self) -> Number:
        """Radius of the released face at the end of the trim."""
        length = _arc_length(self.rim, self.focal) + mp.mpf(self.job.forming.trim_allowance)
        return _radius_at(length, self.focal, self.rim)

    @cached_property
    def percent(self) -> Number:
        """Percentage of springback, solved for where the depth that is lost is stated."""
        stated = self.job.forming.springback
        if stated.depth_loss is None:
            return mp.mpf(stated.percent or 0)
        wanted = _paraboloid(self.rim, self.focal)[1] + mp.mpf(stated.depth_loss)
        return mp.findroot(lambda percent: self._refocused(self.rim, percent)[1] - wanted, (1, 2))

    def _refocused(self, radius: Number, percent: Number) -> Place:
        focal = (1 - percent / 100) * self.focal
        return _paraboloid(_radius_at(_arc_length(radius, self.focal), focal, radius), focal)

    def bent(self, radius: Number, gain: Number) -> Place:
        """Return where a point lies on a face whose curvature is so many times the released one's."""

        def slope(at: Number) -> Number:
            # κ ds is what the slope of the released face grows by.
            return gain * _slope(at, self.focal)

        across = _integral(lambda at: mp.cos(slope(at)) * _stretch(at, self.focal), 0, radius)
        up = _integral(lambda at: mp.sin(slope(at)) * _stretch(at, self.focal), 0, radius)
        return across, up, slope(radius)

    @cached_property
    def mould_focal(self) -> Number:
        """Focal length of the face on the mould, unless the law is that of curvature."""
        return (1 - self.percent / 100) * self.focal

    def on_mould(self, radius: Number) -> Place:
        """Return where a point of the reflecting face lies on the mould, before the part has shrunk."""
        if self.job.forming.springback.law == "curvature":
            return self.bent(radius, 1 / (1 - self.percent / 100))
        return self._refocused(radius, self.percent) if self.percent else _paraboloid(radius, self.focal)

    @cached_property
    def edge(self) -> Place:
        """Where the end of the trim lies on the mould."""
        return self.on_mould(self.end)

    def vacuum_rate(self, radius: Number) -> Number:
        """Return ``d(ln t)/dr = (2π r w − A')/A`` of straight vacuum, ``A = 2π r²/(1 + cos ψ)`` and ``w = 1/cos ψ``."""
        cosine = 1 / _stretch(radius, self.mould_focal)
        falls = -(cosine**3) * radius / (4 * self.mould_focal**2)
        cap = 2 * mp.pi * radius**2 / (1 + cosine)
        grows = 4 * mp.pi * radius / (1 + cosine) - 2 * mp.pi * radius**2 * falls / (1 + cosine) ** 2
        return (2 * mp.pi * radius / cosine - grows) / cap

    def thickness(self, place: Place) -> Number:
        sheet, law = mp.mpf(self.job.sheet.thickness), self.job.forming.thinning.law
        if law == "none":
            return sheet
        if law == "sine-law":
            return sheet * mp.cos(place[2])
        drawn = _integral(self.vacuum_rate, place[0], self.edge[0])
        return sheet * (1 + mp.cos(self.edge[2])) / 2 * mp.exp(-drawn)

    @property
    def through(self) -> int:
        """Whether the sheet lies between reflecting face and mould: −1 where the mould is behind the mirror."""
        return (self.job.forming.contact_face == "concave") - (self.job.reflector.reflecting_face == "concave")

    @cached_property
    def enlargement(self) -> Number:
        return 1 / (1 - mp.mpf(self.job.forming.shrinkage.percent) / 100)

    def mould(self, radius: Number) -> tuple[Number, Number]:
        """Return the point of the cold mould under a point of the reflecting face, its height over the vertex."""
        across, up = self._under(radius)
        return self.enlargement * across, self.enlargement * (up - self._under(mp.mpf(0))[1])

    @cache  # noqa: B019 - five jobs, kept for the session
    def _under(self, radius: Number) -> tuple[Number, Number]:
        place = self.on_mould(radius)
        behind = self.through * self.thickness(place) if self.through else mp.mpf(0)
        return place[0] - behind * mp.sin(place[2]), place[1] + behind * mp.cos(place[2])

    @cached_property
    def edge_slope(self) -> Number:
        """Slope of the mould where the forming surface ends: the face's own, and what the thickness there adds."""
        if not self.through:
            return self.edge[2]
        behind = self.through * self.thickness(self.edge)
        cosine = mp.cos(self.edge[2])
        curvature = cosine**3 / (2 * self.mould_focal)
        return self.edge[2] + mp.atan2(behind * self.vacuum_rate(self.edge[0]) * cosine, 1 - curvature * behind)

    @cached_property
    def volume(self) -> Number:
        """``∫ 2π r t ds`` of the formed sheet."""
        bent = self.job.forming.springback.law == "curvature"
        focal = self.focal if bent else self.mould_focal

        def rate(radius: Number) -> Number:
            # Named by the radius on the mould where the face there is a paraboloid, for then nothing is to be sought.
            place = self.on_mould(radius) if bent else _paraboloid(radius, focal)
            return 2 * mp.pi * place[0] * self.thickness(place) * _stretch(radius, focal)

        return _integral(rate, 0, self.end if bent else self.edge[0])

    @cached_property
    def opening(self) -> Number:
        """Diameter that the clamp leaves free: the outer one of the mould."""
        shape = self.job.mould
        return 2 * (self.mould(self.end)[0] + shape.edge_radius * mp.sin(self.edge_slope) + shape.land_width)

    @cached_property
    def draw(self) -> Number:
        return self.mould(self.end)[1] + self.job.mould.edge_radius * (1 - mp.cos(self.edge_slope))

    @cached_property
    def blank(self) -> Number:
        """Diameter of the blank: of the sheet's volume, or of clamp and grip where it is stretched."""
        if self.job.forming.process == "spinning":
            return mp.sqrt(4 * self.volume / (mp.pi * self.job.sheet.thickness))
        return self.opening + 2 * mp.mpf(self.job.forming.clamp_grip)

    @cached_property
    def mould_best(self) -> BestParabola:
        """The parabola that departs least from the mould, from axis or bore to its end."""
        bore = mp.mpf(self.job.mould.bore_diameter) / 2
        near = self.enlargement * self.mould_focal
        return least_departing(_points(self.mould, _label(self.mould, bore), self.end), float(near))

    def moved(self, face: Face, cause: str, focal: Number | None) -> Sensitivity:
        """Return how far a face has moved; its best focal length is sought where it is no paraboloid."""
        hole = mp.mpf(self.job.reflector.hole_diameter) / 2
        label = _label(face, self.rim)
        deeper = face(label)[1] - face(mp.mpf(0))[1] - self.rim**2 / (4 * self.focal)
        if focal is None:
            # The rim is where it was cut: on the mould, through the sheet's point, or later, at its radius.
            last = self.rim if self.job.forming.trim == "on-mould" else label
            focal = least_departing(_points(face, _label(face, hole), last), float(self.focal)).focal_length
        return Sensitivity(
            cause,
            float(deeper),
            float(2 * (face(self.rim)[0] - self.rim)),
            float(focal - self.focal),
            float(deeper * mp.cos(_slope(self.rim, self.focal))),
        )

    def after_one_point_more(self) -> Sensitivity:
        """Return the part that the same mould makes where springback is one percentage point more."""
        kept = 1 - (self.percent + 1) / 100
        if self.job.forming.springback.law == "curvature":
            gain = kept / (1 - self.percent / 100)
            return self.moved(lambda label: self.bent(label, gain), "springback", None)
        focal = self.mould_focal / kept

        def face(label: Number) -> Place:
            return _paraboloid(_radius_at(_arc_length(label, self.focal), focal, label), focal)

        return self.moved(face, "springback", focal)

    def after_a_thicker_sheet(self) -> Sensitivity:
        """Return the part from a sheet that is 5 % thicker everywhere, as no tolerance is stated."""

        def face(label: Number) -> Place:
            # Laid on the mould the other way round: what is thicker lifts the mirror off it.
            place = _paraboloid(label, self.focal)
            lift = -self.through * self.thickness(place) / 20
            return place[0] - lift * mp.sin(place[2]), place[1] + lift * mp.cos(place[2]), place[2]

        return self.moved(face, "sheet", None if self.through else self.focal)

    def after_more_shrinkage(self) -> Sensitivity:
        """Return the part that shrinks by 0.1 % of the mould more."""
        scale = 1 - self.enlargement / 1000
        return self.moved(
            lambda label: (scale * label, scale * label**2 / (4 * self.focal), label), "shrinkage", scale * self.focal
        )


@cache
def _second(name: str) -> Second:
    return Second(_chain(name).job)


@pytest.fixture(autouse=True)
def _many_digits() -> Any:
    with mp.workdps(DIGITS):
        yield


def _near(value: Number, tolerance: float = EXACT) -> Any:
    return pytest.approx(float(value), rel=tolerance, abs=tolerance)


def _label(face: Face, radius: Number) -> Number:
    """Return the point of the sheet that lies on a radius of a face."""
    return mp.findroot(lambda label: face(label)[0] - radius, radius) if radius else radius


def _points(face: Face, first: Number, last: Number) -> Array:
    labels = [first + (last - first) * number / (SAMPLES - 1) for number in range(SAMPLES)]
    return np.array([face(label)[:2] for label in labels], dtype=np.float64)


def least_departing(points: Array, near: float) -> BestParabola:
    """Return the parabola of least largest distance from a curve, by linear programs on true normal distances.

    The curve runs through its height over a near parabola, a slow function that a cubic spline keeps to 1e-6 of itself.
    """
    radius = np.linspace(points[0, 0], points[-1, 0], DENSE)
    height = radius**2 / (4 * near) + CubicSpline(points[:, 0], points[:, 1] - points[:, 0] ** 2 / (4 * near))(radius)
    opening, vertex, level = 0.25 / near, 0.0, 0.0
    for _ in range(ROUNDS):
        foot = _feet(radius, height - vertex, opening)
        cosine = 1 / np.sqrt(1 + (2 * opening * foot) ** 2)
        aside = (height - vertex - opening * foot**2) / cosine
        size = np.abs(aside).max()
        leans = np.column_stack([(foot / radius[-1]) ** 2, np.ones(DENSE)]) * cosine[:, None]
        rows = np.vstack([np.column_stack([sign * leans, -np.ones(DENSE)]) for sign in (1.0, -1.0)])
        bounds = [(None, None), (None, None), (0, None)]
        found = linprog([0, 0, 1], A_ub=rows, b_ub=np.concatenate([aside, -aside]) / size, bounds=bounds)
        opening, vertex = opening + size * found.x[0] / radius[-1] ** 2, vertex + size * found.x[1]
        level = size * found.x[2]
    return BestParabola(0.25 / opening, vertex, float(level))


def _feet(radius: Array, height: Array, opening: float) -> Array:
    """Return the radii on ``z = a r²`` whose normals pass through points: ``2a² x³ + (1 − 2 a z) x = r``, by Newton."""
    foot = radius.copy()
    for _ in range(8):
        foot -= (2 * opening**2 * foot**3 + (1 - 2 * opening * height) * foot - radius) / (
            6 * opening**2 * foot**2 + 1 - 2 * opening * height
        )
    return foot


@pytest.mark.parametrize("name", NAMES)
def test_the_quadrature_itself(name: str) -> None:
    # Arc length has a closed form, f (x w + asinh x) with x = r/2f; the derivation is a textbook's (from memory).
    second = _second(name)
    share = second.end / (2 * second.focal)
    closed = second.focal * (share * mp.sqrt(1 + share**2) + mp.asinh(share))
    assert abs(_arc_length(second.end, second.focal) - closed) < mp.mpf(10) ** -17 * closed
    assert abs(closed - _arc_length(second.rim, second.focal) - second.job.forming.trim_allowance) < mp.mpf(10) ** -15


@pytest.mark.parametrize("name", NAMES)
def test_the_demo_jobs_are_paraboloids_without_what_is_not_computed_here(name: str) -> None:
    job = _chain(name).job
    assert (job.reflector.conic_constant, job.reflector.asphere) == (-1.0, ())
    assert (job.sheet.coating_thickness, job.sheet.thickness_tolerance, job.mould.cover_thickness) == (0.0, 0.0, 0.0)
    assert (job.forming.flange_width, job.forming.bead_allowance, job.forming.clamp_opening) == (0.0, 0.0, 0.0)
    assert (job.mould.lead_out, job.mould.hub, job.mould.draft_deg, job.mould.outer_diameter) == (None, None, 0.0, 0.0)
    assert job.forming.shrinkage.reference == "cold-mould"
    # Here the sheet lies between mirror and mould only where it does not spring back, and it is drawn only there.
    springback, thinning = job.forming.springback.law, job.forming.thinning.law
    assert springback == "none" or (_second(name).through == 0 and thinning == "none")


@pytest.mark.parametrize("name", NAMES)
def test_the_forming_surface(name: str) -> None:
    chain, second = _chain(name), _second(name)
    assert percent_of(chain.stated_springback) == _near(second.percent)
    rim = rim_of(chain)
    radius, depth = second.mould(second.rim)
    assert rim.mould_radius == _near(radius)
    assert chain.point_on_mould(chain.released.rim)[1] == _near(depth)
    z = -depth if chain.kind == "male" else depth - second.draw
    assert rim.mould_z == _near(z)
    # At the ends, and at places between them that are even on the released face.
    for label in (second.end * number / 8 for number in range(9)):
        across, up = second.mould(label)
        where = chain.forming_surface.at_radius(float(across))
        assert float(chain.forming_surface.height(where)) == _near(up)
    assert float(chain.forming_surface.radius(chain.forming_surface.end)) == _near(second.mould(second.end)[0])


@pytest.mark.parametrize("name", NAMES)
def test_how_far_the_mould_is_from_a_parabola(name: str) -> None:
    second, found = _second(name), best_parabola(_chain(name).mould.curve)
    if not second.through and second.job.forming.springback.law != "curvature":
        # The face itself lies on the mould, refocused or enlarged: a paraboloid again, whatever its trim.
        assert found.focal_length == _near(second.enlargement * second.mould_focal)
        assert found.departure == _near(0.0)
        return
    assert found.departure == pytest.approx(second.mould_best.departure, rel=DEPARTURE)
    assert found.focal_length == pytest.approx(second.mould_best.focal_length, abs=FOCUS)


@pytest.mark.parametrize("name", NAMES)
def test_the_blank(name: str) -> None:
    second, blank = _second(name), blank_of(_chain(name))
    assert blank.diameter == _near(second.blank)
    assert blank.volume == _near(second.volume)
    assert blank.formed_diameter == _near(2 * second.edge[0])
    # A meridian keeps its length, so the sheet on the mould is as long as the released face.
    length = _arc_length(second.rim, second.focal) + second.job.forming.trim_allowance
    assert blank.developed_length == _near(2 * length)
    if second.job.forming.process != "spinning":
        assert blank.clamp_opening == _near(second.opening)
        assert blank.depth_of_draw == _near(second.draw)


@pytest.mark.parametrize("name", NAMES)
def test_the_thickness_of_the_part(name: str) -> None:
    second, blank = _second(name), blank_of(_chain(name))
    hole = mp.mpf(second.job.reflector.hole_diameter) / 2
    labels = [hole + (second.rim - hole) * number / 4 for number in range(5)]
    values = [second.thickness(second.on_mould(label)) for label in labels]
    thinnest = values.index(min(values))
    # All three laws rise or fall all the way, so the thinnest place is an end, or everywhere, then told of the hole.
    assert thinnest in {0, 4}
    assert blank.thinnest == _near(values[thinnest])
    assert blank.thinnest_radius == _near(labels[thinnest])
    assert blank.rim_thickness == _near(values[-1])


@pytest.mark.parametrize("name", NAMES)
def test_the_rim_of_the_part(name: str) -> None:
    second, chain = _second(name), _chain(name)
    rim, place = rim_of(chain), second.on_mould(second.rim)
    slope = _slope(second.rim, second.focal)
    outside = 2 * (second.rim + second.thickness(place) * mp.sin(slope))
    assert rim.outside_diameter == _near(outside)
    assert rim.slope == _near(slope)
    assert hoop_strain(chain).rim == _near(second.rim / place[0] - 1)


@pytest.mark.parametrize("name", NAMES)
def test_the_exact_mould_leads_back_to_the_reflector(name: str) -> None:
    second, chain = _second(name), _chain(name)
    part = chain.to_part(chain.forming_surface)
    depth = second.rim**2 / (4 * second.focal)
    assert part.points(chain.released.rim).tolist() == [_near(second.rim), _near(depth)]
    # At the same radii the height of the parabola: the focal length with it.
    for label in (second.end * number / 8 for number in range(1, 9)):
        assert float(part.height(part.at_radius(float(label)))) == _near(label**2 / (4 * second.focal))
    assert best_parabola(part).focal_length == _near(second.focal)
    assert exact_part(chain).depth == _near(depth)


def _assert_moved(found: Sensitivity, wanted: Sensitivity, focus: float) -> None:
    """Compare, the focal length to so many millimetres."""
    assert found.rim_sag == _near(wanted.rim_sag)
    assert found.form == _near(wanted.form)
    assert found.rim_diameter == _near(wanted.rim_diameter)
    assert found.focal_length == pytest.approx(wanted.focal_length, rel=0.0, abs=focus)


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("arcs", [12, 24])
def test_a_mould_cut_in_chords_leads_back_to_the_reflector(name: str, arcs: int) -> None:
    # Chords through points of the mould lie under it by κa²/8, and less slope than that is hidden in each: the part
    # follows them, four times nearer for half of their length. Their curvature is nothing; all of it is in the kinks.
    second, chain = _second(name), _chain(name)
    points = [second.mould(second.end * number / arcs) for number in range(arcs + 1)]
    part = predicted_part(chain, ArcPath(np.array(points, dtype=np.float64), np.zeros(arcs)))
    sagitta = float(chain.forming_surface.end / arcs) ** 2 / 8.0 * float(chain.forming_surface.curvature(0.0))
    assert abs(part.largest_form_error[0]) < 3.0 * sagitta
    assert part.best_focal_length == pytest.approx(float(second.focal), abs=3.0 * sagitta)


@pytest.mark.parametrize("name", NAMES)
def test_one_percentage_point_more_of_springback(name: str) -> None:
    second, found = _second(name), _sensitivities(name)[0]
    wanted = second.after_one_point_more()
    assert "one percentage point" in found.cause
    _assert_moved(found, wanted, FOCUS if second.job.forming.springback.law == "curvature" else EXACT)


@pytest.mark.parametrize("name", NAMES)
def test_a_sheet_thicker_by_its_tolerance(name: str) -> None:
    second, found = _second(name), _sensitivities(name)[1]
    assert "5 %" in found.cause
    _assert_moved(found, second.after_a_thicker_sheet(), FOCUS if second.through else EXACT)


@pytest.mark.parametrize("name", ["display-bowl", "listening-dish"])
def test_a_tenth_of_a_percent_more_of_shrinkage(name: str) -> None:
    found = _sensitivities(name)[2]
    assert "0.1 %" in found.cause
    _assert_moved(found, _second(name).after_more_shrinkage(), EXACT)
