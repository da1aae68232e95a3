"""The page that a map is read from: one HTML file that needs no network and no other file.

Coordinates are those of the picture (x right, y down, centre of the first pixel at 0, 0); millimetres are the part's own, y up.
Pictures are thinned, never averaged: what the pointer reads is a pixel of ``thickness.tif``.
"""

from sheenmap.report.page import page_html, write_report

__all__ = ["page_html", "write_report"]
