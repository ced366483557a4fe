"""Pictures of every screen and of the batch sheet: python -m blendapp.desk.pictures OUT_DIR

Needs no display. Light and dark, at 100 % and 200 %, on a mill made from the sample workbook in a folder that is
gone afterwards. Each scale is a process of its own, since Qt takes it only when it starts.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
import tempfile
from pathlib import Path

SCALES = (1, 2)
_SAMPLE = Path(__file__).resolve().parent.parent.parent / "sample_data"


def main(arguments: list[str] | None = None) -> int:
    """Returns the exit status."""
    parser = argparse.ArgumentParser(prog="python -m blendapp.desk.pictures", description=__doc__)
    parser.add_argument("out_dir", type=Path, help="the folder for the pictures; made if it is not there")
    parser.add_argument("--workbook", type=Path, default=_SAMPLE / "mill.xlsx", help="the mill to show")
    parser.add_argument("--price-list", type=Path, default=_SAMPLE / "price_list.xlsx", help="the price list to show")
    parser.add_argument("--only", default="", help="only the scene of this name, for example bench or sheet")
    parser.add_argument("--scale", type=int, default=0, help="only this scale, 1 or 2, in this process")
    asked = parser.parse_args(arguments)
    asked.out_dir.mkdir(parents=True, exist_ok=True)
    if asked.scale:
        from blendapp.desk.scenes import take_all

        with tempfile.TemporaryDirectory() as folder:
            take_all(asked.out_dir, asked.workbook, asked.price_list, Path(folder), asked.scale, asked.only)
        return 0
    for scale in SCALES:
        environment = {**os.environ, "QT_QPA_PLATFORM": "offscreen", "QT_SCALE_FACTOR": str(scale)}
        command = [
            sys.executable, "-m", "blendapp.desk.pictures", str(asked.out_dir), "--workbook", str(asked.workbook),
            "--price-list", str(asked.price_list), "--scale", str(scale), "--only", asked.only,
        ]
        done = subprocess.run(command, env=environment, check=False)
        if done.returncode:
            return done.returncode
    return 0


if __name__ == "__main__":
    sys.exit(main())
