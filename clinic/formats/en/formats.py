"""One way to write a date, because 03/02/2025 is two days in two countries."""

DATE_FORMAT = "j M Y"
SHORT_DATE_FORMAT = "Y-m-d"
DATE_INPUT_FORMATS = ["%Y-%m-%d"]
TIME_FORMAT = "H:i"
TIME_INPUT_FORMATS = ["%H:%M"]
DATETIME_FORMAT = "j M Y H:i"
