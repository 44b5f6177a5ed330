"""A reading taken again after the tube was blown out."""

from traverse.checks import _again
from traverse.checks._base import Check, Verdict, View


def decide(view: View) -> Verdict:
    """Fail when the tube read otherwise after it was blown out."""
    cure = "Openings of the tube were plugged: the readings since the last good one are not usable."
    return _again.decide(view, "plugging", view.quality.after_purge, "after_purge", cure)


CHECK = Check(id="plugging", title="Plugged tube", scope="run", decide=decide)
