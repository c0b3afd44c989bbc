"""An edit whose refusal is shown in the place where it was asked for."""

from collections.abc import Callable

from app.live.session import Session
from app.model.drawing import Drawing
from app.model.edits import EditRefused


def attempt(
    session: Session, text: str | Callable[[Drawing], str], change: Callable[[Drawing], Drawing]
) -> str:
    """Make the edit as one undo step; answers the refusal, or nothing. `text` names the step, or makes
    its name from the changed drawing."""
    try:
        after = change(session.drawing)
    except EditRefused as refusal:
        return str(refusal)
    session.edit(text if isinstance(text, str) else text(after), lambda _drawing: after)
    return ""
