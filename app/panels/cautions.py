"""Cautions: what can hurt people or mislead them, and when to say so beside the verdict."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.fabrication.process import ProcessKind
from core.fabrication.shipped import cautions_of

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.assessment import Assessment
    from core.operating import OperatingPoint

# Above this the chip is treated as under pressure. Common practice, no source.
PRESSURE_CAUTION_PA = 100_000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Caution:
    """One caution.

    Attributes
    ----------
    title : str
        Heading on the cautions page.
    text : str
        The caution, in one or two sentences.
    applies : callable or None
        Takes operating point and assessment and tells whether to show it beside the verdict;
        None for those that belong on the page only.
    """

    title: str
    text: str
    applies: Callable[[OperatingPoint, Assessment], bool] | None = None


LEAD_TEXT = (
    "These are reminders in general words. The rules of your laboratory, the safety data sheets of your "
    "materials, the makers' instructions and the law where you work come first; where a licence or training "
    "is asked for, leave the work to those who hold it."
)


def _is_under_pressure(_operating: OperatingPoint, assessment: Assessment) -> bool:
    score = assessment.score
    return score is not None and max(score.forward_pressure_pa, score.reverse_pressure_pa) > PRESSURE_CAUTION_PA


CAUTIONS: tuple[Caution, ...] = (
    Caution(
        title="What the numbers are for",
        text="They are design estimates. Never rely on them for dosing, infusion, life support or any use where a "
        "wrong flow could harm someone.",
    ),
    Caution(
        title="A rectifier always leaks backwards",
        text="It resists one direction more than the other; it is not a shut-off valve.",
    ),
    Caution(
        title="Chips under pressure",
        text="Above about 100 kPa a chip can burst and tubing can fly off. Wear eye protection, use a "
        "regulator and a relief valve, prove the chip with liquid before gas, and stay at half the strength of "
        "its weakest bond or below.",
        applies=_is_under_pressure,
    ),
    Caution(
        title="Compressed gas",
        text="Gas stores far more energy than liquid at the same pressure: prove the chip with liquid first, and "
        "shield it. At high gas speeds the density changes along the channel, which the estimate leaves out.",
        applies=lambda operating, _assessment: operating.fluid == "air",
    ),
    Caution(
        title="Flammable liquids",
        text="Ethanol and its vapour catch fire: ventilate, keep flames, hot plates and sparks away, and check that "
        "chip, glue and tubing withstand it.",
        applies=lambda operating, _assessment: operating.fluid == "ethanol",
    ),
    Caution(
        title="A fluid of your own",
        text="Density and viscosity are taken as you gave them. Read the liquid's safety data sheet, and check that "
        "chip and tubing withstand it.",
        applies=lambda operating, _assessment: operating.fluid == "own",
    ),
)


def applying(operating: OperatingPoint, assessment: Assessment) -> tuple[Caution, ...]:
    """Return the cautions to show beside the verdict."""
    return tuple(c for c in CAUTIONS if c.applies is not None and c.applies(operating, assessment))


def cautions_page() -> str:
    """Return the page of all cautions as simple rich text: those of use, then those of every way of making."""
    of_use = "".join(f"<h4>{caution.title}</h4><p>{caution.text}</p>" for caution in CAUTIONS)
    of_making = "".join(
        f"<h4>{str(kind).capitalize()}</h4><ul>{''.join(f'<li>{text}</li>' for text in cautions_of(kind))}</ul>"
        for kind in ProcessKind
    )
    return f"<h3>Cautions</h3><p>{LEAD_TEXT}</p>{of_use}<h3>In making</h3>{of_making}"
