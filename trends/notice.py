"""The words that stand on every page, print, export and command."""

NOTICE = (
    "Decisions rest with the licensed clinician and local protocols. Ebbline records and "
    "calculates; it does not diagnose or prescribe. Not assessed or approved as a medical "
    "device; check local rules before clinical use. Not for emergencies."
)
