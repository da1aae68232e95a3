"""The commands: parse, call, print. stdout carries results and nothing else; what is for human eyes goes to stderr.

Heavy rooms are imported inside the commands, so that ``sheenmap --help`` answers at once.
"""

from sheenmap.cli.program import main, program

__all__ = ["main", "program"]
