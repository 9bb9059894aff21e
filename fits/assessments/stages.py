"""The stages of an assessment as a list that a reader can follow."""

from dataclasses import dataclass

from fits.assessments.models import Assessment


@dataclass(frozen=True)
class StageLine:
    """A stage, and whether it is past, now or to come."""

    words: str
    when: str


def stages_of(assessment: Assessment) -> list[StageLine]:
    """All stages but the end, in order."""
    stages = [stage for stage in Assessment.Stage if stage is not Assessment.Stage.ENDED]
    values = [stage.value for stage in stages]
    now = values.index(assessment.stage) if assessment.stage in values else len(stages)
    return [
        StageLine(stage.label.capitalize(), "past" if i < now else "now" if i == now else "to come")
        for i, stage in enumerate(stages)
    ]
