"""``sheenmap materials``: what the catalogue holds."""

from typing import Any

import click

from sheenmap.cli.failures import Command
from sheenmap.cli.options import json_option
from sheenmap.cli.telling import columns

KINDS = ("material", "lamp", "observer", "camera")
SHOWN_NM = (400.0, 500.0, 550.0, 633.0, 700.0)


@click.command("materials", cls=Command)
@click.argument("name", required=False)
@json_option
def materials_command(name: str | None, as_json: bool) -> None:
    """List the materials, lamps, observers and cameras that recipes may name, or tell all about the one called NAME."""
    from sheenmap import catalogue
    from sheenmap.storage import render_json, to_plain

    if name is None:
        listed = {kind: [catalogue.entry(kind, known) for known in catalogue.names(kind)] for kind in KINDS}
        if as_json:
            click.echo(render_json(to_plain(listed)), nl=False)
            return
        for kind, entries in listed.items():
            click.echo(f"{kind}s")
            for line in columns([(f"  {entry.name}", entry.description) for entry in entries]):
                click.echo(line)
        return
    entry, index = _found(name)
    document = {**to_plain(entry), "index": index}
    click.echo(render_json(document) if as_json else "\n".join(_told(document)), nl=not as_json)


def _found(name: str) -> tuple[Any, list[dict[str, float]]]:
    """The entry of any kind by its name, and a material's index at a few wavelengths."""
    import numpy as np

    from sheenmap import catalogue
    from sheenmap.errors import UnknownNameError
    from sheenmap.spectra import sample

    known = [listed for kind in KINDS for listed in catalogue.names(kind)]
    for kind in KINDS:
        try:
            entry = catalogue.entry(kind, name)
        except UnknownNameError:
            continue
        if kind != "material":
            return entry, []
        values = sample(catalogue.material(name), np.array(SHOWN_NM), interpolation="monotone cubic")
        return entry, [{"wavelength_nm": w, "n": float(v.real), "k": abs(float(v.imag))} for w, v in zip(SHOWN_NM, values)]
    raise UnknownNameError("material, lamp, observer or camera", name, known)


def _told(document: dict[str, Any]) -> list[str]:
    lines = [f"{document['name']} ({document['kind']})"]
    for key in ("description", "source", "licence", "range_nm", "also", "caution"):
        value = document.get(key)
        if value:
            shown = ", ".join(str(part) for part in value) if isinstance(value, list) else value
            lines.append(f"  {key.replace('_nm', ', nm')}: {shown}")
    rows = [(f"  {row['wavelength_nm']:g} nm", f"n {row['n']:.4f}", f"k {row['k']:.4g}") for row in document["index"]]
    return lines + columns(rows)
