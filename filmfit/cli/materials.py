"""`filmfit materials`: the library, with references and valid ranges.

Knows options; the library stands in materials.py.
"""

import click


@click.group(epilog="Example: filmfit materials list")
def materials() -> None:
    """List and show the materials of the library."""


@materials.command("list", epilog="Example: filmfit materials list")
def list_() -> None:
    """List the materials: name, what a fit does with it, valid range, description."""
    from filmfit.materials import library, material
    from filmfit.report.text import materials_text

    click.echo(materials_text([material(name) for name in library()]))


@materials.command("show", epilog="Example: filmfit materials show ITO")
@click.argument("name")
def show(name: str) -> None:
    """Show a material: reference, origin, range, laws or tables."""
    from filmfit.materials import material
    from filmfit.report.text import material_text

    click.echo(material_text(material(name)))
