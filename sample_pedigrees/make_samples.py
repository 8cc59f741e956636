"""Make the four sample pedigrees. All of it is invented, and the same bytes come out every time.

Usage: python sample_pedigrees/make_samples.py [--out DIR]
"""

from __future__ import annotations

import argparse
from pathlib import Path

from make_colony_k_voles import make_colony_k_voles
from make_fellmoor_sheep import make_fellmoor_sheep
from make_lantern_bay_pipefish import make_lantern_bay_pipefish
from make_tarn_crane import make_tarn_crane

MAKERS = {
    "tarn-crane.csv": make_tarn_crane,
    "lantern-bay-pipefish.csv": make_lantern_bay_pipefish,
    "fellmoor-sheep.csv": make_fellmoor_sheep,
    "colony-k-voles.csv": make_colony_k_voles,
}


def main() -> None:
    """Write every sample into the chosen folder, by default the one this script is in."""
    parser = argparse.ArgumentParser(description="Make the four invented sample pedigrees.")
    parser.add_argument(
        "--out",
        type=Path,
        default=Path(__file__).parent,
        metavar="DIR",
        help="folder for the CSV files (default: the folder of this script)",
    )
    folder = parser.parse_args().out
    folder.mkdir(parents=True, exist_ok=True)
    for file_name, make in MAKERS.items():
        make(folder / file_name)


if __name__ == "__main__":
    main()
