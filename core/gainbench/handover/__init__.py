"""Files for firmware: the C header of an assessment, what goes with it, and where such a file came from.

Nothing here knows of sheets as text: a caller says which sheet and which tuning the gains are from.
"""

from gainbench.handover.bench import bench_procedure
from gainbench.handover.cautions import BUS_CONDITION, CAUTIONS, ESTIMATE, NOT_MODELLED, SIGN_CONVENTION
from gainbench.handover.figures import Row, loop_rows, response_rows, step_rows
from gainbench.handover.header import Header, Source, refusal, write_header
from gainbench.handover.kept import kept_sheet
from gainbench.handover.origin import Difference, Origin, differences, read_origin
from gainbench.handover.writing import write_handover

__all__ = [
    "BUS_CONDITION",
    "CAUTIONS",
    "ESTIMATE",
    "NOT_MODELLED",
    "SIGN_CONVENTION",
    "Difference",
    "Header",
    "Origin",
    "Row",
    "Source",
    "bench_procedure",
    "differences",
    "kept_sheet",
    "loop_rows",
    "read_origin",
    "refusal",
    "response_rows",
    "step_rows",
    "write_handover",
    "write_header",
]
