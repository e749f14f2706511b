"""The three aligned panels of an eye, described once for the screen and for paper.

Pure geometry: it knows neither Django nor the rules, and every number with a clinical meaning
(limits, repeatability, what is comparable) is handed in.
"""

from clinic.chart.build import panels_for
from clinic.chart.geometry import Panels
from clinic.chart.given import EyeGiven, EyeMark, LimitPiece, Reading

__all__ = ["EyeGiven", "EyeMark", "LimitPiece", "Panels", "Reading", "panels_for"]
