"""A scenario in words: what will be simulated, one line for each thing."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import groupby
from operator import itemgetter

from driftwell.coulomb.bunch_frames import grouped
from driftwell.coulomb.crossover import LEAST
from driftwell.coulomb.direct import SMALL
from driftwell.electrodes.form import electrodes_words
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph
from driftwell.images.form import ClosedForm, ImagesForm, MirrorForm
from driftwell.particles.species import bodies
from driftwell.record.form import DEFAULT_RECORDS, DEFAULT_TRACKS
from driftwell.scenario.cautions import cautions
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import LoadedScenario
from driftwell.scenario.source import shown_path

WIDTH = 100
_SECTION, _LEAST_NAME, _MOST_NAME = 12, 8, 24

Row = tuple[str, str, str]


def explain(loaded: LoadedScenario) -> list[str]:
    """The lines that `driftwell check` prints of a scenario without faults."""
    scenario = loaded.scenario
    lines = [scenario.title, f"{shown_path(loaded.path)}, digest {loaded.digest[:12]}", ""]
    for section, those in groupby(rows(loaded), key=itemgetter(0)):
        entries = [(name, words) for _, name, words in those]
        name_width = min(_MOST_NAME, max(_LEAST_NAME, *(len(name) for name, _ in entries)))
        for i, (name, words) in enumerate(entries):
            lines += _laid_out("" if i else section, name, name_width, words)
    for heading, sentences in (("Note", list(notes(loaded))), ("Caution", cautions(scenario))):
        if sentences:
            lines.append("")
            lines += _laid_out(heading, "", 0, " ".join(sentences))
    return lines


def rows(loaded: LoadedScenario) -> Iterator[Row]:
    """What is simulated: section, name and words of each thing."""
    scenario = loaded.scenario
    known = bodies(scenario.species)
    yield "duration", "", f"{spelled(scenario.duration, 's')}, seed {scenario.seed}"
    for name, species in scenario.species.items():
        yield "species", name, species.words()
    for cloud in scenario.cloud:
        yield "cloud", cloud.name, cloud.words(known, loaded.folder)
    for source in scenario.source:
        yield "source", source.name, source.words(scenario.setting(loaded.folder))
    for field in scenario.field:
        yield "field", field.name, field.words()
    if scenario.electrode:
        yield "electrodes", "", electrodes_words(scenario.electrodes)
    for electrode in scenario.electrode:
        yield "electrode", electrode.name, electrode.words()
    for wall in scenario.wall:
        yield "wall", wall.name, f"{wall.words()}; {_EFFECT[wall.effect]}"
    for detector in scenario.detector:
        yield "detector", detector.name, detector.words()
    yield "Coulomb", "", _coulomb_words(loaded)
    if scenario.images is not None:
        yield "images", "", _images_words(scenario.images)
    if scenario.cell is not None:
        yield "cell", "", scenario.cell.words()
    for process in scenario.process:
        yield "process", process.name, process.bounded_words()
    yield "stepping", "", _stepping_words(scenario)
    yield "record", "", _record_words(scenario)
    for question in scenario.question:
        yield "question", question.name, question.words()


def _images_words(images: ImagesForm) -> str:
    """What answers to the charges, and how near to it their force still grows."""
    if isinstance(images, MirrorForm):
        return f"{images.words()}; {images.closest_words()}"
    return images.words()


_EFFECT = {"absorb": "absorbs", "reflect": "reflects"}


def _coulomb_words(loaded: LoadedScenario) -> str:
    coulomb = loaded.scenario.coulomb
    if coulomb.method == "off":
        return "off: the charges do not feel each other"
    charges = loaded.scenario.charges(loaded.folder)
    soft = f"softened within {spelled(coulomb.softening, 'm')}"
    if not coulomb.softening:
        soft = "without softening"
    tree = f"a tree, to {coulomb.accuracy:g} of the force (rms)"
    if (
        coulomb.method == "direct"
        or charges <= SMALL
        or (coulomb.method == "auto" and charges < LEAST)
    ):
        way = "every pair of charges"
    elif coulomb.method == "tree":
        way = tree
    else:
        way = f"every pair of charges, or where that is faster on the machine {tree}"
    precise = "" if coulomb.precision == "auto" else f", in {coulomb.precision} precision"
    return f"{way}, {soft}{precise}{_frame_words(loaded.scenario)}"


def _frame_words(scenario: Scenario) -> str:
    coulomb = scenario.coulomb
    if coulomb.frame == "laboratory":
        return ", of charges as at rest in the laboratory"
    if coulomb.frame == "auto":
        return ""
    count = max(grouped([cloud.name for cloud in scenario.cloud], coulomb.share_frame)) + 1
    return f", in the rest frame{'s' * (count > 1)} of {count} bunch{'es' * (count > 1)}"


def _stepping_words(scenario: Scenario) -> str:
    stepping = scenario.stepping
    if isinstance(stepping.step, float):
        step = f"steps of {spelled(stepping.step, 's')}"
    else:
        step = f"{stepping.steps_per_period:g} steps in a period of the fastest motion"
    words = f"{stepping.scheme}, {step}"
    if stepping.coulomb_every > 1:
        words += f", Coulomb sum every {stepping.coulomb_every} steps"
    return f"{words}; fails beyond {spelled(stepping.extent, 'm')}"


def _record_words(scenario: Scenario) -> str:
    record = scenario.record
    every = record.every or scenario.duration / DEFAULT_RECORDS
    tracks = (
        f"up to {DEFAULT_TRACKS} charges" if record.tracks is None else f"{record.tracks} charges"
    )
    if record.snapshots is None:
        snapshots = "at start and end"
    else:
        snapshots = f"every {spelled(record.snapshots, 's')}"
    return f"every {spelled(every, 's')}, tracks of {tracks}; snapshots of all {snapshots}"


def notes(loaded: LoadedScenario) -> Iterator[str]:
    """What is allowed, but may not be meant."""
    scenario = loaded.scenario
    known, setting = bodies(scenario.species), scenario.setting(loaded.folder)
    amounts = [(cloud.name, cloud.amount(known, loaded.folder)) for cloud in scenario.cloud]
    amounts += [(source.name, source.amount(setting)) for source in scenario.source]
    heavy = [
        (name, amount.weight)
        for name, amount in amounts
        if amount.weight > 1.0 and amount.count > 1
    ]
    softened = scenario.coulomb.softening > 0.0 or scenario.coulomb.method == "off"
    if heavy and not softened:
        name, weight = max(heavy, key=lambda pair: pair[1])
        yield (
            f'Charges of "{name}" stand for {weight:.6g} real ones each and meet without '
            "softening: chance encounters push harder than real ones; see [coulomb] softening."
        )
    stopped = scenario.wall or scenario.electrode
    if isinstance(scenario.images, ClosedForm) and not stopped:
        yield (
            "Nothing stops charges at the conductor that answers with images: a [[wall]] where it "
            "is does."
        )
    if not scenario.question:
        yield "No [[question]] is asked: the run only records."


def _laid_out(section: str, name: str, name_width: int, words: str) -> list[str]:
    """One thing on as many lines as it takes; a long name has its own first line."""
    margin = f"  {section:<{_SECTION}}"
    if not name:
        return _wrapped(margin, len(margin), words)
    indent = len(margin) + name_width + 2
    if len(name) > name_width:
        return [margin + name, *_wrapped(" " * indent, indent, words)]
    return _wrapped(f"{margin}{name:<{name_width}}  ", indent, words)


def _wrapped(margin: str, indent: int, words: str) -> list[str]:
    return paragraph(words, WIDTH, margin, " " * indent)
