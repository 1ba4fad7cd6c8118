"""Makes the kept packs, pictures and pages anew: ``python -m tests.regenerate``. Look at what it makes."""

from __future__ import annotations

import shutil
import subprocess
import sys

from fabgen.job_page import job_page
from tests import template_feeds
from tests.examples import EXAMPLES, PICTURES, ROOT, render


def main() -> None:
    """Replaces ``out_examples/``, ``docs/job-file.md``, the pictures in ``docs/`` and the feeds in ``tests/sized/``."""
    (ROOT / "docs" / "job-file.md").write_text(job_page(), encoding="utf-8")
    (ROOT / "out_examples").mkdir(exist_ok=True)
    for name in EXAMPLES:
        target = ROOT / "out_examples" / name
        if target.exists():
            shutil.rmtree(target)
        # a process each, as a user runs it: the CAD kernel orders some entities by what it built before
        words = ["pack", str(ROOT / "templates" / f"{name}.toml"), "-o", str(target)]
        subprocess.run([sys.executable, "-m", "fabgen", *words], check=True)
    template_feeds.main(())
    for picture, (name, page) in PICTURES.items():
        render(ROOT / "out_examples" / name / "sheets.pdf", page, ROOT / picture)


if __name__ == "__main__":
    main()
