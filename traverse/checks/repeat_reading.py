"""One reading of each line taken again at its end."""

from traverse.checks import _again
from traverse.checks._base import Check, Verdict, View


def decide(view: View) -> Verdict:
    """Fail when a second reading is more than the share from the first."""
    cure = "The flow was not steady, or a reading was wrong: repeat the traverse."
    return _again.decide(view, "repeat-reading", view.quality.repeats, "repeats", cure)


CHECK = Check(id="repeat-reading", title="Readings taken again", scope="run", decide=decide)
