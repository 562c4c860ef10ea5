"""Limit lines of radiated disturbances: shipped ones, a user's own, and their look-up.

=================================  ==================================================
`ids`, `line`, `matching`          shipped lines by id, and ids by a phrase
`detector_lines`                   several lines at the frequencies of a board
`highest_frequency_hz`             up to where a standard measures
`judged_range`                     from where to where the chosen lines of a board hold
`user_line`                        a line from the rows of a user's table
`listing`, `describe`              plain text for a person
=================================  ==================================================
"""

from edgeplan.limits.highest_frequency import HighestFrequency, highest_frequency_hz, rule_title
from edgeplan.limits.judged_range import JudgedRange, judged_range
from edgeplan.limits.lines import DETECTORS, Band, LimitLine
from edgeplan.limits.listing import describe, listing
from edgeplan.limits.shipped import ids, line, matching
from edgeplan.limits.stacking import DetectorLine, detector_lines
from edgeplan.limits.user import Fault, UserLineError, user_line

__all__ = [
    "DETECTORS",
    "Band",
    "DetectorLine",
    "Fault",
    "HighestFrequency",
    "JudgedRange",
    "LimitLine",
    "UserLineError",
    "describe",
    "detector_lines",
    "highest_frequency_hz",
    "ids",
    "judged_range",
    "line",
    "listing",
    "matching",
    "rule_title",
    "user_line",
]
