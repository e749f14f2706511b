"""The choices of the sheet in words; blank always says what it means."""

from clinic.forms.fields import choices
from trends.measures.ranges import ranges

NOTATIONS = (
    ("", "choose the notation"),
    ("etdrs_letters", "ETDRS letters"),
    ("snellen_ft", "Snellen, feet (20/40)"),
    ("snellen_m", "Snellen, metres (6/12)"),
    ("decimal", "decimal (0.5)"),
    ("logmar", "logMAR (0.30)"),
    ("off_chart", "off the chart (CF, HM, LP, NLP)"),
)
CHARTS = (
    ("", "chart not recorded"),
    ("etdrs", "ETDRS"),
    ("electronic_etdrs", "electronic ETDRS"),
    ("snellen", "Snellen"),
    ("other", "other"),
)
CORRECTIONS = choices("refracted", "glasses", "pinhole", "none", blank="correction not recorded")
METHODS = choices("applanation", "rebound", "non_contact", "other", blank="tonometer not recorded")
GRADES = choices("yes", "no", "unsure", "not_graded", blank="blank: not looked at")
GRADERS = choices("clinician", "technician", "reading_centre", blank="grader not recorded")
SYMPTOMS = (
    ("pain", "pain"),
    ("redness", "redness"),
    ("vision_loss", "vision loss"),
    ("blurred", "blurred"),
    ("floaters", "floaters"),
    ("light_sensitivity", "light sensitivity"),
    ("no_perception", "no perception"),
)
LENSES = choices("clear", "cataract", "artificial", "none", "not_seen")
AGENTS = (*ranges("agents").texts("anti_vegf"), *ranges("agents").texts("steroid"))
