"""The open drawing, its history and its live solution. QtCore and the undo stack; no widgets."""
