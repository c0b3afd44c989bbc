"""The drawing as a value: kinds, edits, parts, units and the file. Knows no Qt."""
