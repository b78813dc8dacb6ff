"""How the numbers of a run are to be read: the words of the page, in short notes."""

from __future__ import annotations

from driftwell.report.page.markup import coded
from driftwell.report.page.section import Section
from driftwell.report.page.table import listed

_NOTES = (
    (
        "± (sampling error)",
        "One standard deviation by which the answer would scatter if other charges had been drawn, "
        "as the run itself tells it. It knows nothing of the time step, the Coulomb sum, the map "
        "of a field or of macro-charges: `driftwell converge` measures those.",
    ),
    (
        "by hand",
        "What a published formula says to the same question, with the scenario's numbers. Within "
        "its range it should agree to within its own simplifications; outside it is given as a "
        "warning, not as a check.",
    ),
    (
        "verdict, doubt",
        "A figure of the record that lies beyond a limit. A doubt concerns the answers as a whole, "
        "any other one the part that it names.",
    ),
    (
        "charge, real particle, weight",
        "One simulated charge may stand for many real particles: so many is its weight. Sums in "
        "coulombs and joules have the weights in them.",
    ),
    (
        "residual",
        "What the account lacks at its closing, over the largest amount that was in it. That of "
        "energy shows the step; those of momenta are rounding.",
    ),
    (
        "rms size, emittance, temperature",
        "All about the mean of the charges that are left, so losses change them too. The "
        "temperature is that of the motion about the mean.",
    ),
    (
        "proper velocity",
        "gamma times the velocity: below a hundredth of the speed of light the same as the "
        "velocity, to 5 digits.",
    ),
    (
        "digest",
        "The same for the same content, however it is written down. Two runs of one digest and one "
        "version of driftwell on one kind of machine have the same bits.",
    ),
)


def reading_notes() -> Section:
    """The notes."""
    return Section(
        "reading",
        "How to read the numbers",
        listed([(name, coded(words)) for name, words in _NOTES]),
    )
