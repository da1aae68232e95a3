"""Maps and scores the proving scenes that may lie beside a checkout; says so and ends well where they do not.

python benchmarks/prove.py [SCENE ...]
"""

import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
PROVING = ROOT.parent / "shared" / "proving"
OUT = ROOT / "proving_out"


def main(names: list[str]) -> int:
    """Map each scene with the command line, then print the scorer's table."""
    scenes = sorted(path.parent for path in PROVING.glob("open/*/recipe.toml"))
    if not scenes:
        print("no proving scenes beside this checkout: nothing to prove")
        return 0
    for scene in scenes:
        if names and scene.name not in names:
            continue
        photo = next(path for path in sorted(scene.iterdir()) if path.stem == "photo")
        command = [sys.executable, "-m", "sheenmap", "map", str(photo), "--recipe", str(scene / "recipe.toml")]
        status = subprocess.run([*command, "--out", str(OUT / scene.name)], stdout=subprocess.DEVNULL, check=False).returncode
        if status not in (0, 1, 3):
            print(f"{scene.name}: exit status {status}")
            return 1
    return subprocess.run([sys.executable, str(PROVING / "score.py"), "--all", str(OUT)], check=False).returncode


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
