"""How the ring estimates were verified, and where they end.

Five studies with general-purpose finite elements (scikit-fem, quadratic
elements) stand behind the ring formulas. Scripts and stored tables are in
tests/outside/; part of each is solved again in every test run, all of it in
the slow run.

1. Flat ring on an elastic bed, axisymmetric, one-sided contact: 81 rings of
AWWA C207 B, D, E, F, ASME B16.5 lap joint and EN 1092-1 PN10, PN16, 2 to 63 in,
each on a hub of 0.5 h and of 50 years. Median and largest error: lever arm 0.04
and 0.25 %, rotation 0.5 and 2.0 %, bore-corner stress 1.0 and 3.0 %. Beyond a
thickness of 0.6 times the root of bore radius times width the section is too
stubby, beyond b/a = 2 too wide, for ring theory; such rings are flagged.

2. The hub as a real body: ring, collar and pipe meshed together, PE on PE and
PE on steel, 50 joints. At bolt-up the true arm is 1.035 times that of the bed,
with a scatter of 0.06. The pipe's axial pull tilts the collar: 1.14 times where
the pull is 0.3 of the bolt load, 1.27 at 0.5, 1.40 at 0.7. The column
"loose-ring rating, pipe pulling" and the limit state "ring yield" carry it.

3. Bolt holes, three-dimensional, half a bolt pitch with washer load: 65 models.
Bore corner 1.05 to 1.38, hole edge 1.4 to 2.5, rotation 1.04 to 1.28 times the
smooth ring's; the three formulas meet them with median errors of 1.0, 1.6 and
0.7 % and largest of 8, 15 and 3 %.

4. Collapse: six rings, elastic-plastic (von Mises, perfectly plastic),
axisymmetric. The couple is met within 2 % at every rotation; permanent rotation
within 0.06 of the rotation at first yield. A dished ring pushes its contact to
the rim and carries up to 1.28 times the load at which its section first yields
as a whole, so holding the clamp down at that load is on the safe side.

5. Sections that are not flat: the built-in solver against finer meshes of five
outlines: arm within 0.2 %, rotation within 1 %, peak stress within 5 %. A sharp
inner corner has no finite stress and is left out, with a flag.

Outside finite elements: App. 2's Y(K) is exactly the annular plate loaded by
edge couples; 109.4 of App. 2-14 is 6 x 180 / pi squared; a 24 in Class D ring at
200 psi shows about 35 700 psi in the trade's finite elements (common practice,
no source), this estimate 11 % more for the smooth ring. Not covered: friction,
bolts pulling unevenly, misfit, uneven creep within the collar; a scatter of 0.10
stands for them by judgement.
"""
