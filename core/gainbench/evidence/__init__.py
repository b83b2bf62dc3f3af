"""Evidence: logs recorded on the bench, and what follows from them."""

from gainbench.evidence.log import Log, demand
from gainbench.evidence.reading import LogSurvey, SurveyedColumn, read_log, survey_log

__all__ = ["Log", "LogSurvey", "SurveyedColumn", "demand", "read_log", "survey_log"]
