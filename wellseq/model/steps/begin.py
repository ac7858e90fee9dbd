"""begin: where a cloud already sits, and where the outputs already stand, when the table starts."""

from wellseq.model.effects import Placed
from wellseq.model.pen import Pen
from wellseq.model.step import Cloud, Electrode, Pattern, Step


class Begin(Step):
    """`begin with CLOUD in PATTERN at ELECTRODE`; several clouds: several lines, one pattern."""

    IN_LANE = False
    FIRST = True

    with_: Cloud
    in_: Pattern
    at: Electrode

    def clash(self, first: Step) -> str:
        """All clouds begin in one and the same pattern."""
        if isinstance(first, Begin) and self.in_ != first.in_:
            return "all clouds begin in one and the same pattern, and this is another one"
        return ""

    def draw(self, pen: Pen) -> None:
        """Put the outputs at the pattern before time zero and the cloud into its well."""
        pen.begin(self.in_.volts, self.in_.others_V)
        pen.note(Placed(self.with_, self.at))
