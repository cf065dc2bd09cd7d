"""The limit states, by machine name: label, what is compared, and where the rule comes from."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class LimitState:
    label: str
    meaning: str
    source: str


LIMIT_STATES = {
    "ring_rating": LimitState(
        "ring against rating",
        "Operating pressure plus recurrent surge over the loose-ring rating at the chosen safety factor on yield.",
        "ASME BPVC VIII-1 Appendix 2 (loose ring) with the arm to the hub's true reaction; AWWA C207 compares its ratings with operating pressure plus surge.",
    ),
    "ring_yield": LimitState(
        "ring yield",
        "Stress at the bore corner under the bolt load at operating pressure plus occasional surge, over yield.",
        "ASME BPVC VIII-1 Appendix 2 (loose ring); bolt load from the clamp where the torque is known, else the design bolt load.",
    ),
    "ring_collapse": LimitState(
        "ring collapse",
        "Bolt load at operating pressure plus occasional surge over the load at which the ring's whole section yields.",
        "Limit analysis of a ring under a uniform twisting couple, net of bolt holes.",
    ),
    "bolts": LimitState(
        "bolts",
        "Bolt stress at operating pressure plus occasional surge over proof stress (0.7 of yield where no proof stress is published).",
        "ISO 898-1, SAE J429, ASTM A193/A307; tensile area by ASME B1.1 and ISO 898-1.",
    ),
    "face_operating": LimitState(
        "face, operating",
        "Clamp force needed to keep the face tight at operating pressure over the clamp force that is left.",
        "Joint equilibrium with relaxed clamp; required stress m P after ASME BPVC VIII-1 Appendix 2.",
    ),
    "face_recurrent": LimitState(
        "face, recurrent surge",
        "The same at operating pressure plus recurrent surge.",
        "As for operating pressure.",
    ),
    "face_occasional": LimitState(
        "face, occasional surge",
        "The same at operating pressure plus occasional surge.",
        "As for operating pressure.",
    ),
    "pipe_operating": LimitState(
        "pipe wall, operating",
        "Operating pressure over the pipe's pressure rating 2 HDS F_T / (DR - 1).",
        "AWWA C906 / M55, PPI Handbook of PE Pipe; ISO 4427 for metric pipe.",
    ),
    "pipe_recurrent": LimitState(
        "pipe wall, recurrent surge",
        "Operating pressure plus recurrent surge over 1.5 times the rating.",
        "AWWA M55.",
    ),
    "pipe_occasional": LimitState(
        "pipe wall, occasional surge",
        "Operating pressure plus occasional surge over 2.0 times the rating.",
        "AWWA M55.",
    ),
    "ring_fatigue": LimitState(
        "ring fatigue",
        "Miner's sum at the edge of a bolt hole under the usual pressure cycle, from installation to the end of the horizon.",
        "EN 1993-1-9 (category from memory); DNV-RP-C203 in free corrosion (read in open-source code); peak stress by finite elements.",
    ),
    "bolt_fatigue": LimitState(
        "bolt fatigue",
        "Miner's sum of the bolts under the usual pressure cycle, from installation to the end of the horizon.",
        "EN 1993-1-9, bolts in tension (category from memory).",
    ),
    "pipe_fatigue": LimitState(
        "pipe fatigue",
        "Range of the usual pressure cycle over the pipe's rating re-rated for the number of cycles in 100 years.",
        "Published guideline factors for PE80 and PE100 (from memory, not confirmed); newer PE is rarely governed by fatigue.",
    ),
}
