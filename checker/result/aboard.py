"""Pack what is aboard each boat for the JSON result: a boat tells what it has otherwise than its design."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from checker.boat.aboard import Aboard, Lines
from checker.result.model import Study, SubjectResult


@dataclass(frozen=True, slots=True)
class Packed:
    """Tell the lines of one boat: those of another boat, without some, and with others in their place."""

    like: str
    without: tuple[str, ...]
    lines: Lines


def packed(studies: Sequence[Study], subjects: Sequence[SubjectResult]) -> dict[str, Packed]:
    """Return the lines of each study, packed: a hull against its option set, an option set against the bare class."""
    lines = {study.name: study.aboard.lines for study in studies if study.aboard is not None}
    study_of = {subject.id: subject.study for subject in subjects}
    found: dict[str, Packed] = {}
    for subject in subjects:
        if subject.study in found or subject.study not in lines:
            continue
        design = study_of.get(" + ".join((subject.class_id, *subject.options)), "")
        like = study_of.get(subject.class_id, "") if design == subject.study else design
        if like == subject.study or like not in lines:
            like = ""
        found[subject.study] = _against(like, lines.get(like, {}), lines[subject.study])
    return found


def _against(like: str, base: Lines, own: Lines) -> Packed:
    return Packed(
        like,
        tuple(key for key in base if key not in own),
        {key: line for key, line in own.items() if base.get(key) != line},
    )


def unpacked(all_packed: Mapping[str, Packed]) -> dict[str, Aboard]:
    """Return the lines of each study.

    Raises:
        ValueError: If a study is told like one that is not there, or in a circle.
    """
    found: dict[str, Aboard] = {}

    def lines_of(name: str, asked: tuple[str, ...]) -> Lines:
        if name in found:
            return found[name].lines
        if name in asked or name not in all_packed:
            raise ValueError(f"what is aboard {name} is told in a circle, or nowhere")
        mine = all_packed[name]
        base = lines_of(mine.like, (*asked, name)) if mine.like else {}
        found[name] = Aboard({**{k: v for k, v in base.items() if k not in set(mine.without)}, **mine.lines})
        return found[name].lines

    for name in all_packed:
        lines_of(name, ())
    return found
