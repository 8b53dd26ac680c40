"""The process that proposes a layout: `python -I -m qcreport.workbook.propose_child`.

Asked as the reader child is, and under the same limits; answers with one line.
"""

from __future__ import annotations

import gc
import json
import sys

from qcreport.errors import ExportRefusedError
from qcreport.workbook.limits import Limits
from qcreport.workbook.propose import propose
from qcreport.workbook.propose_draft import to_json
from qcreport.workbook.reader_child import limit_this_process, refuse_for_memory
from qcreport.workbook.wire import encode_refusal


def main() -> int:
    """Answer the one request on standard input."""
    header = json.loads(sys.stdin.buffer.readline())
    limits = Limits(**header["limits"])
    limit_this_process(limits)
    gc.disable()  # as in the reader child
    data = sys.stdin.buffer.read()
    try:
        line = to_json(propose(data, name=header["name"], plan_name=header["plan_name"], limits=limits))
    except ExportRefusedError as refusal:
        line = encode_refusal(refusal)
    except (MemoryError, RecursionError):
        line = encode_refusal(refuse_for_memory(limits))
    sys.stdout.buffer.write(line)
    sys.stdout.buffer.flush()
    return 0


if __name__ == "__main__":
    sys.exit(main())
