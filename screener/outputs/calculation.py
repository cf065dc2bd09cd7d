"""One joint's calculation as steps that an engineer can redo by hand.

Each step prints its formula, the numbers put in, and the result; the
arithmetic is written so that it can be evaluated as it stands, and a test
does so. Lengths, forces and stresses are in one consistent set: in, lbf, psi
or mm, N, MPa.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener import limits
from screener.mechanics import bolts as bolt
from screener.mechanics import pipe_wall, ring
from screener.mechanics.bolt_holes import bore_stress_factor
from screener.records import Fleet
from screener.units import to_unit


@dataclass(frozen=True)
class Step:
    """formula: HTML; arithmetic: an expression of numbers (Python syntax); value: its result in `unit`."""

    chapter: str
    title: str
    symbol: str
    formula: str
    arithmetic: str
    value: float
    unit: str
    source: str
    note: str = ""


@dataclass(frozen=True)
class Units:
    """A consistent set: 1 force unit / 1 length unit^2 = 1 stress unit."""

    length: str
    stress: str
    force: str

    def l(self, value) -> float:  # noqa: E743
        return float(to_unit(value, self.length))

    def p(self, value) -> float:
        return float(to_unit(value, self.stress))

    def f(self, value) -> float:
        return float(to_unit(value, self.force))


US = Units("in", "psi", "lbf")
METRIC = Units("mm", "MPa", "N")
APP2 = "ASME BPVC VIII-1 Appendix 2, loose-type ring flange"


def n(value: float) -> str:
    """A number as printed in the arithmetic: six significant digits, no exponent where it can be helped."""
    text = f"{value:.6g}"
    return f"({text})" if value < 0 else text


class Calculation:
    """Builds the steps of joint `i` of a fleet."""

    def __init__(self, fleet: Fleet, i: int, safety_factor: float, system: str, sections: dict) -> None:
        self.sections = sections
        self.fleet = fleet.take(np.array([i]))
        self.factor = safety_factor
        self.u = US if system == "us" else METRIC
        self.steps: list[Step] = []
        self.chapter = ""

    def add(self, title, symbol, formula, arithmetic, value, unit, source, note="") -> float:
        self.steps.append(Step(self.chapter, title, symbol, formula, arithmetic, float(value), unit, source, note))
        return float(value)

    def build(self) -> list[Step]:
        fleet, u = self.fleet, self.u
        self.pipe, self.r, self.b = fleet.pipe, fleet.ring, fleet.bolts
        self.hole = bore_stress_factor(
            self.r.hole_diameter, self.b.count, self.r.bolt_circle_diameter / 2, self.r.bore_diameter / 2, self.r.outside_diameter / 2, self.r.thickness
        )
        self.short_modulus = limits.modulus(self.pipe.family, limits.SHORT_TERM, self.pipe.temperature)
        self.state = limits.ring_state(fleet, self.short_modulus, self.hole, self.factor, self.sections)
        self.clamped = limits.clamp_state(fleet, self.state)
        self._face(u)
        if limits.uses_stated_rating(fleet, self.sections)[0]:
            self._stated(u)
        elif solved := dict(limits.solved_sections(fleet, self.short_modulus, self.sections)):
            self._section(u, solved[0])
        else:
            self._ring(u)
        self._clamp(u)
        self._pressure(u)
        self._pipe(u)
        return self.steps

    def _face(self, u: Units) -> None:
        self.chapter = "Face and bolt load"
        pipe, hub, face, loads = self.pipe, self.fleet.hub, self.fleet.face, self.fleet.loads
        bore = u.l(pipe.bore_diameter[0])
        self.add("Bore of the pipe", "D<sub>b</sub>", "D (1 − 2/DR)", f"{n(u.l(pipe.outside_diameter[0]))} * (1 - 2 / {n(pipe.dimension_ratio[0])})", bore, u.length, "geometry")
        area = face.contact_area[0] / self.length_si**2
        inner = np.sqrt(u.l(hub.outside_diameter[0]) ** 2 - area * 4 / np.pi)
        self.add("Contact area of the face", "A<sub>f</sub>", "π/4 (D<sub>h</sub>² − D<sub>i</sub>²)", f"pi / 4 * ({n(u.l(hub.outside_diameter[0]))}**2 - {n(inner)}**2)", area, f"{u.length}²", "hub outside diameter; D<sub>i</sub> the larger of the two bores")
        g = u.l(face.pressure_diameter[0])
        self.add("Pressure diameter", "G", "(D<sub>h</sub> + D<sub>i</sub>)/2", f"({n(u.l(hub.outside_diameter[0]))} + {n(inner)}) / 2", g, u.length, "middle of the face")
        recurrent = loads.operating_pressure[0] + loads.recurrent_surge[0]
        p = self.add("Operating pressure plus recurrent surge", "P", "P<sub>op</sub> + ΔP", f"{n(u.p(loads.operating_pressure[0]))} + {n(u.p(loads.recurrent_surge[0]))}", u.p(recurrent), u.stress, "AWWA C207: ratings are compared with operating pressure plus surge")
        m = face.required_stress_factor[0]
        load = ring.app2_bolt_load(recurrent, face.pressure_diameter[0], face.contact_area[0], m)
        self.design_load = u.f(load)
        self.add("Design bolt load", "W", "π/4 G² P + m P A<sub>f</sub>", f"pi / 4 * {n(g)}**2 * {n(p)} + {n(m)} * {n(p)} * {n(area)}", self.design_load, u.force, "ASME BPVC VIII-1 Appendix 2, W<sub>m1</sub>")

    @property
    def length_si(self) -> float:
        return 0.0254 if self.u.length == "in" else 0.001

    def _stated(self, u: Units) -> None:
        self.chapter = "Ring by its stated rating"
        r = self.r
        rating = ring.stated_rating_pressure(r.stated_rating[0], r.stated_safety_factor[0], self.factor)
        self.add("Rating at the safety factor chosen", "P<sub>N</sub>", "P<sub>r</sub> N<sub>r</sub> / N", f"{n(u.p(r.stated_rating[0]))} * {n(r.stated_safety_factor[0])} / {n(self.factor)}", u.p(rating), u.stress, "proportional rule; common practice, no source", "The ring is not a flat plate; its stated rating is taken to be for loose use.")

    def _section(self, u: Units, solved) -> None:
        self.chapter = "Ring by its section"
        r = self.r
        f = float(self.hole[0])
        per_load = solved.peak_stress_per_load * self.length_si**2
        stress = self.add("Peak stress of the section", "S", "f W (S/W)", f"{n(f)} * {n(self.design_load)} * {n(per_load)}", f * self.design_load * per_load, u.stress, "axisymmetric finite elements of the section on the elastic hub; f for the bolt holes", f"S/W = {per_load:.5g} per {u.length}² and lever arm {u.l(solved.lever_arm):.4g} {u.length} come from the solution of section {r.section[0]!s}; they can't be redone by hand.")
        p = u.p(self.fleet.loads.operating_pressure[0] + self.fleet.loads.recurrent_surge[0])
        self.add("Loose-ring rating", "P<sub>N</sub>", "P (σ<sub>y</sub>/N) / S", f"{n(p)} * ({n(u.p(r.yield_strength[0]))} / {n(self.factor)}) / {n(stress)}", u.p(self.state.rating[0]), u.stress, "the stress is proportional to pressure")

    def _ring(self, u: Units) -> None:
        self.chapter = "Ring on the hub"
        r, hub = self.r, self.fleet.hub
        a, b, t = u.l(r.bore_diameter[0] / 2), u.l(r.outside_diameter[0] / 2), u.l(r.thickness[0])
        rb = u.l(r.bolt_circle_diameter[0] / 2)
        ro = min(u.l(hub.outside_diameter[0] / 2), b)
        modulus, hub_modulus, h = u.p(r.modulus[0]), u.p(self.short_modulus[0]), u.l(hub.thickness[0])
        stiff = modulus * t**3 * np.log(b / a) / 12
        self.add("Rigidity of the ring, per radian", "D<sub>r</sub>", "E t³ ln(b/a) / 12", f"{n(modulus)} * {n(t)}**3 * log({n(b)} / {n(a)}) / 12", stiff, f"{u.force} {u.length}", "Timoshenko, ring under a uniform twisting couple")
        k = hub_modulus / h
        self.add("Bed stiffness of the hub", "k", "E<sub>pe</sub> / h", f"{n(hub_modulus)} / {n(h)}", k, f"{u.stress}/{u.length}", "collar as an elastic bed; E<sub>pe</sub> at 0.5 h and the joint's temperature, PPI Handbook ch. 3")
        contact = self._contact()
        rn, arm = u.l(contact.neutral_radius[0]), u.l(self.state.lever_arm[0])
        rc = max(a, rn)
        first = self._moment(rc, ro, rn, None)
        second = self._moment(rc, ro, rn, rb)
        lhs = k * second
        expression = f"{n(k)} * ((-{n(ro)}**4/4 + ({n(rb)} + {n(rn)}) * {n(ro)}**3/3 - {n(rb)} * {n(rn)} * {n(ro)}**2/2) - (-{n(rc)}**4/4 + ({n(rb)} + {n(rn)}) * {n(rc)}**3/3 - {n(rb)} * {n(rn)} * {n(rc)}**2/2))"
        self.add(
            "Neutral radius: balance of moments about the bolts",
            "k I<sub>2</sub>",
            "k ∫ (r − r<sub>n</sub>)(r<sub>b</sub> − r) r dr from r<sub>c</sub> to r<sub>o</sub>, equal to D<sub>r</sub>",
            expression,
            lhs,
            f"{u.force} {u.length}",
            "own derivation, checked against finite elements",
            f"r<sub>n</sub> = {rn:.5g} {u.length} is the radius at which both sides agree; contact runs from {rc:.5g} to {ro:.5g} {u.length}.",
        )
        self.add(
            "Lever arm",
            "e",
            "∫ (r − r<sub>n</sub>)(r<sub>b</sub> − r) r dr / ∫ (r − r<sub>n</sub>) r dr",
            f"{n(second)} / (({n(ro)}**3/3 - {n(rn)} * {n(ro)}**2/2) - ({n(rc)}**3/3 - {n(rn)} * {n(rc)}**2/2))",
            arm,
            u.length,
            "own derivation, checked against finite elements",
            f"Denominator {first:.6g} {u.length}³.",
        )
        big_k = b / a
        y = ring.taylor_forge_y(big_k)
        self.add("Ring factor", "Y", "[0.66845 + 5.71690 K² log<sub>10</sub>K / (K² − 1)] / (K − 1), K = b/a", f"(0.66845 + 5.71690 * {n(big_k)}**2 * log10({n(big_k)}) / ({n(big_k)}**2 - 1)) / ({n(big_k)} - 1)", y, "", APP2)
        f = float(self.hole[0])
        s = f * y * self.design_load * arm / (t**2 * 2 * a)
        self.add("Stress at the bore corner", "S", "f Y W e / (t² 2a)", f"{n(f)} * {n(y)} * {n(self.design_load)} * {n(arm)} / ({n(t)}**2 * 2 * {n(a)})", s, u.stress, APP2 + "; f for the bolt holes from three-dimensional finite elements")
        sigma = u.p(r.yield_strength[0])
        p = u.p(self.fleet.loads.operating_pressure[0] + self.fleet.loads.recurrent_surge[0])
        rating = u.p(self.state.rating[0])
        self.add("Loose-ring rating", "P<sub>N</sub>", "P (σ<sub>y</sub>/N) / S", f"{n(p)} * ({n(sigma)} / {n(self.factor)}) / {n(s)}", rating, u.stress, "the stress is proportional to pressure")
        self.add("Bolt load at first yield", "W<sub>y</sub>", "σ<sub>y</sub> t² 2a / (f Y e)", f"{n(sigma)} * {n(t)}**2 * 2 * {n(a)} / ({n(f)} * {n(y)} * {n(arm)})", u.f(self.state.first_yield_load[0]), u.force, APP2)
        d = u.l(r.hole_diameter[0])
        self.add("Bolt load at collapse", "W<sub>p</sub>", "(π/2) σ<sub>y</sub> t² (b − a − d<sub>h</sub>) / e", f"pi / 2 * {n(sigma)} * {n(t)}**2 * ({n(b)} - {n(a)} - {n(d)}) / {n(arm)}", u.f(self.state.plastic_load[0]), u.force, "limit analysis, net of a bolt hole")

    def _contact(self):
        r = self.r
        bore, outer = r.bore_diameter / 2, r.outside_diameter / 2
        return ring.hub_contact(bore, np.minimum(self.fleet.hub.outside_diameter / 2, outer), r.bolt_circle_diameter / 2, bore, outer, r.thickness, r.modulus, self.short_modulus, self.fleet.hub.thickness)

    @staticmethod
    def _moment(rc, ro, rn, rb):
        """Integral of (r - rn) r, or of (r - rn)(rb - r) r when rb is given, from rc to ro."""
        if rb is None:
            return (ro**3 - rc**3) / 3 - rn * (ro**2 - rc**2) / 2
        return -(ro**4 - rc**4) / 4 + (rb + rn) * (ro**3 - rc**3) / 3 - rb * rn * (ro**2 - rc**2) / 2

    def _clamp(self, u: Units) -> None:
        self.chapter = "Clamp"
        b, face, hub = self.b, self.fleet.face, self.fleet.hub
        torque = u.f(b.assembly_torque[0]) * float(to_unit(1.0, u.length))
        asked = u.f((b.count * bolt.bolt_force_from_torque(b.assembly_torque, b.nut_factor, b.diameter))[0])
        self.add("Clamp force that the torque asks for", "n T/(K d)", "n T / (K d)", f"{n(b.count[0])} * {n(torque)} / ({n(b.nut_factor[0])} * {n(u.l(b.diameter[0]))})", asked, u.force, "PPI TN-38", f"T in {u.force} {u.length}.")
        proof = u.f((b.count * b.tensile_area * b.allowed_stress)[0])
        self.add("Clamp force that the bolts can hold", "n A<sub>s</sub> σ<sub>p</sub>", "n A<sub>s</sub> σ<sub>p</sub>", f"{n(b.count[0])} * {n(b.tensile_area[0] / self.length_si**2)} * {n(u.p(b.allowed_stress[0]))}", proof, u.force, "ASME B1.1 / ISO 898-1 areas; proof stress of the grade")
        plastic = u.f(self.state.plastic_load[0])
        force = u.f(self.clamped.assembly_force[0])
        self.add("Clamp force at assembly", "F<sub>0</sub>", "the least of the two and W<sub>p</sub>", f"min({n(asked)}, {n(proof)}, {n(plastic)})", force, u.force, "bolts can't hold more than the ring carries")
        collars = 2 if face.mating_side_is_pe[0] else 1
        r = self.r
        ring_part = ring.ring_compliance(self.state.lever_arm, r.thickness, r.bore_diameter / 2, r.outside_diameter / 2, r.modulus)[0] * collars
        bolt_part = bolt.bolt_compliance(b.grip_length, b.count, b.modulus, b.tensile_area)[0]
        per = self.length_si / (1.0 / float(to_unit(1.0, u.force)))  # m/N of one length unit per force unit
        e, t, a, bb = u.l(self.state.lever_arm[0]), u.l(r.thickness[0]), u.l(r.bore_diameter[0] / 2), u.l(r.outside_diameter[0] / 2)
        c_r = self.add("Give of the rings", "C<sub>r</sub>", "n<sub>c</sub> 6 e² / (π E t³ ln(b/a))", f"{collars} * 6 * {n(e)}**2 / (pi * {n(u.p(r.modulus[0]))} * {n(t)}**3 * log({n(bb)} / {n(a)}))", ring_part / per, f"{u.length}/{u.force}", "rotation of the ring at the bolt circle")
        c_b = self.add("Give of the bolts", "C<sub>b</sub>", "L / (n E A<sub>s</sub>)", f"{n(u.l(b.grip_length[0]))} / ({n(b.count[0])} * {n(u.p(b.modulus[0]))} * {n(b.tensile_area[0] / self.length_si**2)})", bolt_part / per, f"{u.length}/{u.force}", "elementary")
        years = self.fleet.age.assessment_year[0] - self.fleet.age.installed_year[0]
        moduli = [u.p(limits.modulus(self.pipe.family, d, self.pipe.temperature)[0]) for d in (limits.TIGHTENING, max(years * limits.YEAR, limits.TIGHTENING), limits.SURGE)]
        area, h = face.contact_area[0] / self.length_si**2, u.l(hub.thickness[0])
        names = (("just tightened", "C<sub>0</sub>"), (f"after {years:.1f} years", "C<sub>t</sub>"), ("under a surge", "C<sub>s</sub>"))
        c = [
            self.add(f"Give of the collars, {words}", symbol, "n<sub>c</sub> h / (E<sub>pe</sub> A<sub>f</sub>)", f"{collars} * {n(h)} / ({n(modulus)} * {n(area)})", collars * h / (modulus * area), f"{u.length}/{u.force}", "apparent modulus for the duration, PPI Handbook ch. 3")
            for (words, symbol), modulus in zip(names, moduli, strict=True)
        ]
        kept = (c_r + c_b + c[0]) / (c_r + c_b + c[1])
        self.add("Share kept since installation", "R", "(C<sub>r</sub> + C<sub>b</sub> + C<sub>0</sub>) / (C<sub>r</sub> + C<sub>b</sub> + C<sub>t</sub>)", f"({n(c_r)} + {n(c_b)} + {n(c[0])}) / ({n(c_r)} + {n(c_b)} + {n(c[1])})", kept, "", "series of an elastic and a creeping part at constant stretch")
        self.force_now = u.f(self.clamped.force_now[0])
        if abs(self.fleet.age.last_tightened_year[0] - self.fleet.age.installed_year[0]) > 0.01:
            since = self.fleet.age.assessment_year[0] - self.fleet.age.last_tightened_year[0]
            later = u.p(limits.modulus(self.pipe.family, max(since * limits.YEAR, limits.TIGHTENING), self.pipe.temperature)[0])
            then = u.p(limits.modulus(self.pipe.family, max((years - since) * limits.YEAR, limits.TIGHTENING), self.pipe.temperature)[0])
            r2 = (c_r + c_b + c[0]) / (c_r + c_b + collars * h / (later * area))
            r1 = (c_r + c_b + c[0]) / (c_r + c_b + collars * h / (then * area))
            self.add("Clamp force now, tightened again", "F", "F<sub>0</sub> R + (F<sub>0</sub> − F<sub>0</sub> R<sub>1</sub>) R<sub>2</sub>", f"{n(force)} * {n(kept)} + ({n(force)} - {n(force)} * {n(r1)}) * {n(r2)}", self.force_now, u.force, "superposition of stretch increments", f"R<sub>1</sub> = {r1:.4g} kept when tightened again, R<sub>2</sub> = {r2:.4g} kept of what was added, {since:.1f} years ago.")
        else:
            self.add("Clamp force now", "F", "F<sub>0</sub> R", f"{n(force)} * {n(kept)}", self.force_now, u.force, "as above")
        self.phi = self.add("Load factor under a surge", "φ", "C<sub>s</sub> / (C<sub>r</sub> + C<sub>b</sub> + C<sub>s</sub>)", f"{n(c[2])} / ({n(c_r)} + {n(c_b)} + {n(c[2])})", float(self.clamped.load_factor[0]), "", "bolted-joint diagram, as VDI 2230")

    def _pressure(self, u: Units) -> None:
        self.chapter = "Joint under pressure"
        fleet, face = self.fleet, self.fleet.face
        occasional = fleet.loads.operating_pressure + fleet.loads.occasional_surge
        p = self.add("Operating pressure plus occasional surge", "P<sub>x</sub>", "P<sub>op</sub> + ΔP<sub>x</sub>", f"{n(u.p(fleet.loads.operating_pressure[0]))} + {n(u.p(fleet.loads.occasional_surge[0]))}", u.p(occasional[0]), u.stress, "inventory or assumption")
        axial = u.f(limits.axial_pull(fleet, occasional)[0])
        pipe = self.pipe
        if fleet.loads.restrained[0]:
            season = u.p(limits.modulus(pipe.family, limits.SEASON, pipe.temperature)[0])
            area = pipe_wall.wall_area(pipe.outside_diameter[0], pipe.dimension_ratio[0]) / self.length_si**2
            self.add("Axial pull of the restrained pipe", "N", "(ν P<sub>x</sub> (DR − 1)/2 + E α ΔT) A<sub>p</sub>", f"({limits.LONG_POISSON} * {n(p)} * ({n(pipe.dimension_ratio[0])} - 1) / 2 + {n(season)} * {limits.EXPANSION} * {n(fleet.loads.cooling[0])}) * {n(area)}", axial, u.force, "PPI Handbook ch. 6 and 8 (from memory)", "ΔT in K, cooling below the installation temperature.")
        else:
            self.add("Axial pull of the closed pipe", "N", "P<sub>x</sub> π/4 D<sub>b</sub>²", f"{n(p)} * pi / 4 * {n(u.l(pipe.bore_diameter[0]))}**2", axial, u.force, "free body")
        h = u.f(limits.separating_load(fleet, occasional)[0])
        g, bore = u.l(face.pressure_diameter[0]), u.l(pipe.bore_diameter[0])
        self.add("Load that parts the faces", "H", "P<sub>x</sub> π/4 (G² − D<sub>b</sub>²) + N", f"{n(p)} * pi / 4 * ({n(g)}**2 - {n(bore)}**2) + {n(axial)}", h, u.force, "free body of stub end and ring")
        m, area = face.required_stress_factor[0], face.contact_area[0] / self.length_si**2
        needed = m * p * area + (1 - self.phi) * h
        self.add("Clamp needed to stay tight", "F<sub>req</sub>", "m P<sub>x</sub> A<sub>f</sub> + (1 − φ) H", f"{n(m)} * {n(p)} * {n(area)} + (1 - {n(self.phi)}) * {n(h)}", needed, u.force, "ASME BPVC VIII-1 Appendix 2 for m P; bolted-joint diagram")
        self.add("Face utilization, occasional surge", "U", "F<sub>req</sub> / F", f"{n(needed)} / {n(self.force_now)}", needed / self.force_now, "", "1 where the face is just tight")

    def _pipe(self, u: Units) -> None:
        self.chapter = "Pipe wall"
        pipe, loads = self.pipe, self.fleet.loads
        rating = pipe_wall.pressure_rating(pipe.hydrostatic_design_stress[0], pipe.dimension_ratio[0], pipe.temperature_factor[0])
        if not np.isfinite(rating):
            return
        pr = self.add("Pressure rating of the pipe", "PR", "2 HDS F<sub>T</sub> / (DR − 1)", f"2 * {n(u.p(pipe.hydrostatic_design_stress[0]))} * {n(pipe.temperature_factor[0])} / ({n(pipe.dimension_ratio[0])} - 1)", u.p(rating), u.stress, "AWWA C906 / M55, PPI Handbook; ISO 4427")
        operating = u.p(loads.operating_pressure[0])
        self.add("Pipe utilization, operating", "U", "P<sub>op</sub> / PR", f"{n(operating)} / {n(pr)}", operating / pr, "", "AWWA M55")


def calculation_steps(fleet: Fleet, i: int, safety_factor: float, system: str, sections: dict | None = None) -> list[Step]:
    """The steps of joint i; the formulas themselves are those of `limits` and the mechanics."""
    return Calculation(fleet, i, safety_factor, system, sections or {}).build()
