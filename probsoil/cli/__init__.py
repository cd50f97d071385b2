"""The command line: one thin module per command, nothing decided here."""

from probsoil.cli.application import main

__all__ = ["main"]
