"""The materials of the legs: hazardous elements, and words of care in their files."""

from __future__ import annotations

from collections.abc import Iterator

from tegdesign.design.caution.common import caution
from tegdesign.design.rating import Caution, Rating

REACTIVE = ("burning-dust", "reacts-with-moisture")
NOT_TOXIC = (*REACTIVE, "copper")  # any other tag, also one of a user's own file, counts as toxic
MARKS = ("USE WITH CARE", "COMPOSITION DOUBTFUL", "computed from bands, not measured")


def toxic(rating: Rating) -> Iterator[Caution]:
    """Warn of toxic elements and vapours, by the hazard tags of the material."""
    for leg, m in zip("np", rating.materials, strict=True):
        tags = [tag for tag in m.hazard_tags if tag not in NOT_TOXIC]
        if tags:
            yield caution(
                f"toxic-elements-{leg}",
                f"Hazardous elements in the {leg} leg",
                ", ".join(tags),
                "none of these",
                f"{m.name}: {_sentence(m.hazards)} Cut and grind wet and under extraction, label the "
                "module, recycle it.",
                f"material file of {m.name}",
            )


def reactive(rating: Rating) -> Iterator[Caution]:
    """Warn of dust that burns and of materials that react with moisture."""
    for leg, m in zip("np", rating.materials, strict=True):
        tags = [tag for tag in m.hazard_tags if tag in REACTIVE]
        if tags:
            told = any(tag not in NOT_TOXIC for tag in m.hazard_tags)  # then the caution above has the words
            yield caution(
                f"reactive-material-{leg}",
                f"Reactive material in the {leg} leg",
                ", ".join(tags),
                "none of these",
                f"{m.name}: {'' if told else _sentence(m.hazards) + ' '}Keep flames and sparks from its "
                "dust and moisture from its surface, in the workshop and in use.",
                f"material file of {m.name}",
            )


def words_of_care(rating: Rating) -> Iterator[Caution]:
    """Pass on the warnings and marked notes of a material file."""
    for leg, m in zip("np", rating.materials, strict=True):
        marked = [note for note in m.notes if any(mark in note for mark in MARKS)]
        said = [*m.warnings, *marked]
        if said:
            found = [mark for mark in MARKS if any(mark in words for words in said)]
            yield caution(
                f"material-care-{leg}",
                f"The material of the {leg} leg is to be used with care",
                ", ".join(found) or "warning in its file",
                "no such mark",
                " ".join(_sentence(words) for words in said),
                f"material file of {m.name}",
            )


def _sentence(words: str) -> str:
    text = words.strip().rstrip(";")
    return text if text.endswith((".", ")")) or not text else f"{text}."
