"""A run of ``fabgen pack`` for the robustness tests: the real writing, with the sample feed in place of the sizing
(no parts, so that a run takes a fraction of a second).

Arguments: those of the command line. FABGEN_TEST_PAUSE: seconds to wait inside the pack, after its first files.
"""

from __future__ import annotations

import os
import sys
import time
import types
from dataclasses import replace

from fabgen import pack
from fabgen.cli import main
from tests.samples import sample_feed


def _size_feed(job: object, progress: object) -> object:
    return sample_feed()


def _pausing(content: pack.Content) -> None:
    tables(content)
    sys.stderr.write("first files are written\n")
    sys.stderr.flush()
    time.sleep(float(os.environ.get("FABGEN_TEST_PAUSE", "0")))


if __name__ == "__main__":
    sys.modules["fabgen.sizing.size_feed"] = types.SimpleNamespace(size_feed=_size_feed)  # type: ignore[assignment]
    pack.build_content = lambda feed: ((), ())
    pack.require_agreement = lambda folder: None
    tables = pack.GROUPS["tables"].write
    pack.GROUPS = {**pack.GROUPS, "tables": replace(pack.GROUPS["tables"], write=_pausing)}
    sys.exit(main(sys.argv[1:]))
