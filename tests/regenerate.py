"""Makes the kept packs, pictures and pages anew: ``python -m tests.regenerate``. Look at what it makes."""

from __future__ import annotations

import shutil
import sys

from fabgen.cache import Cache, default_folder
from fabgen.job_page import job_page
from fabgen.job_reader import read_job
from fabgen.pack import write_pack
from fabgen.progress import Lines
from fabgen.sized import sized_feed
from tests.examples import EXAMPLES, PICTURES, ROOT, render


def main() -> None:
    """Replaces ``out_examples/``, ``docs/job-file.md`` and the pictures in ``docs/``."""
    (ROOT / "docs" / "job-file.md").write_text(job_page(), encoding="utf-8")
    (ROOT / "out_examples").mkdir(exist_ok=True)
    for name in EXAMPLES:
        progress = Lines(sys.stderr)
        target = ROOT / "out_examples" / name
        if target.exists():
            shutil.rmtree(target)
        job = read_job(ROOT / "templates" / f"{name}.toml")
        write_pack(sized_feed(job, progress, Cache(default_folder())), target, None, progress)
    for picture, (name, page) in PICTURES.items():
        render(ROOT / "out_examples" / name / "sheets.pdf", page, ROOT / picture)


if __name__ == "__main__":
    main()
