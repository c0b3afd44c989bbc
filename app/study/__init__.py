"""Drawing to solver rows to results by id. Knows no Qt."""

from app.study.curve import TapCurve, tap_curve
from app.study.path import path
from app.study.run import run
from app.study.starts import starts

__all__ = ["TapCurve", "path", "run", "starts", "tap_curve"]
