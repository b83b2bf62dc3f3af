"""A fit in a process of its own, so that the window stays usable and a cancel ends it at once.

Started as ``python -m`` of this module. It takes a pickled request from standard input and writes messages to standard
output, each a length and a pickle; only the window that started it reads them.
"""

from __future__ import annotations

import os
import pickle
import sys
from typing import BinaryIO

LENGTH_BYTES = 8
"""Of the length before each message."""


def write_message(out: BinaryIO, message: object) -> None:
    """Write one message whole."""
    body = pickle.dumps(message, protocol=pickle.HIGHEST_PROTOCOL)
    out.write(len(body).to_bytes(LENGTH_BYTES, "big") + body)
    out.flush()


def main() -> int:
    """Fit what standard input asks for."""
    # Whatever a library prints goes to standard error: standard output is for messages.
    out = os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)
    from gainbench_app.pages.evidence.fit_task import fit

    request = pickle.load(sys.stdin.buffer)
    try:
        write_message(out, fit(request, lambda progress: write_message(out, progress)))
    except BrokenPipeError:
        return 1
    return 0


if __name__ == "__main__":
    sys.exit(main())
