"""The closed words of a visit and the numbers they become in columns; -1 is "not recorded"."""

NOT_RECORDED = -1

SIDES = ("R", "L")
KINDS = (
    "planned",
    "check_only",
    "treatment_only",
    "virtual",
    "unscheduled",
    "after_surgery",
    "contact",
)
STATUSES = ("in_treatment", "watched", "paused", "stopped", "care_elsewhere", "not_followed")
CAUSES = ("diabetic", "branch_vein", "central_vein", "uveitic", "after_surgery", "other")
OCT_CLASSES = ("TD", "SD-RPE", "SD-BM", "SS")
QUALITIES = ("poor", "good")
GRADES = ("no", "yes", "unsure", "not_graded")
NOTATIONS = ("etdrs_letters", "logmar", "snellen_ft", "snellen_m", "decimal", "off_chart")
CHARTS = ("etdrs", "electronic_etdrs", "snellen", "other")
CORRECTIONS = ("refracted", "glasses", "pinhole", "none")
IOP_METHODS = ("applanation", "rebound", "non_contact", "other")
REGIMENS = (
    "as_needed_stability",
    "treat_and_extend",
    "fixed_interval",
    "long_interval",
    "personal_interval",
    "implant",
    "as_needed_vision",
    "as_needed_rvo",
    "watch_until_loss",
)
SEXES = ("f", "m")
ATTENDANCES = (
    "came",
    "did_not_come",
    "cancelled_by_patient",
    "cancelled_by_clinic",
    "moved",
)
SYMPTOMS = (
    "pain",
    "redness",
    "vision_loss",
    "blurred",
    "floaters",
    "light_sensitivity",
    "no_perception",
)
# What bears on a treatment of a person, a bit each; an allergy is to a drug or an antiseptic.
CONTEXT = ("pregnancy", "stroke", "heart_attack", "allergy")
# Ordered: a step down the list of categories is a step of vision; "chart" is every measured line.
OFF_CHART = ("NLP", "LP", "HM", "CF")
ON_CHART = len(OFF_CHART)
