"""``python -m sheenmap`` is the same as ``sheenmap``."""

from sheenmap.cli import main

if __name__ == "__main__":
    main()
