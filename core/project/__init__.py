"""The chip project: its value, its file, older versions of the file, and recovery after a crash."""

from core.project.chip import ChipProject, ParameterSet, new_project
from core.project.files import PROJECT_SUFFIX, read_project, write_project
from core.project.recovery import RecoveryOffer, RecoveryOutcome, RecoveryStore
from core.project.solved import SolvedResult, kept_results

__all__ = [
    "PROJECT_SUFFIX",
    "ChipProject",
    "ParameterSet",
    "RecoveryOffer",
    "RecoveryOutcome",
    "RecoveryStore",
    "SolvedResult",
    "kept_results",
    "new_project",
    "read_project",
    "write_project",
]
