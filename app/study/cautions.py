"""The cautions that stand on every result that leaves the program; worded once."""

CAUTIONS = (
    "Results are a design aid. Local codes and a licensed practitioner decide.",
    "Verify the site data, above all lengths, ratings and taps, before energising.",
    "Protection, earthing and fault levels need their own study.",
    "Every value marked assumed was not given; confirm it before relying on these figures.",
)
