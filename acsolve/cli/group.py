"""The program's commands, loaded when they are asked for, and its help texts."""

from __future__ import annotations

from importlib import import_module
from textwrap import wrap
from typing import Any

import click

from acsolve import AnalysisError, Diagnostic
from acsolve.cli.usage import near

#: Command -> what it answers. Each stands in a module of its name in `acsolve.cli.commands`.
COMMANDS = {
    "check": "does the file make sense: size, order, natural modes, every problem",
    "equations": "the nodal equations: matrix, unknowns and excitation",
    "transfer": "closed form from one pair to another, limits, poles and zeros",
    "impedance": "closed form of the impedance looking into a pair",
    "two-port": "z, y, h, g, ABCD and s parameters of two pairs",
    "cutoff": "every frequency where the response crosses a level",
    "sweep": "gain, phase and delays over a band, as table, file or picture",
    "step": "response in time to a step, impulse or sine; rise, delay, settling",
    "draw": "the schematic, drawn from the netlist alone",
    "note": "the design note: one document with derivation, pictures and numbers",
}


class Program(click.Group):
    """All commands; a module is imported only when its command is named."""

    def list_commands(self, ctx: click.Context) -> list[str]:  # noqa: ARG002 - click's signature
        """The commands in the order of the help text."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:  # noqa: ARG002
        """The command of that name, or None."""
        if cmd_name not in COMMANDS:
            return None
        module = import_module(f"acsolve.cli.commands.{cmd_name.replace('-', '_')}")
        command: click.Command = module.command
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """The command that the arguments name.

        Raises
        ------
        AnalysisError
            [command.unknown] there is no such command.
        """
        name = args[0]
        if name not in COMMANDS:
            raise AnalysisError(
                Diagnostic(
                    code="command.unknown",
                    message=f"acsolve has no command {name}",
                    hint=near(name, COMMANDS) or f"The commands are {', '.join(COMMANDS)}.",
                )
            )
        return super().resolve_command(ctx, args)

    def get_help(self, ctx: click.Context) -> str:  # noqa: ARG002
        """The help text of the program."""
        width = max(map(len, COMMANDS)) + 2
        return "\n".join(
            [
                "acsolve COMMAND FILE [options]",
                "",
                "Solves linear AC circuits exactly: closed forms, cutoffs and sweeps between",
                "any two nodes. FILE holds the circuit; - reads it from standard input.",
                "",
                *(f"  {name.ljust(width)}{text}" for name, text in COMMANDS.items()),
                "",
                "acsolve COMMAND --help tells what a command takes.",
            ]
        )


class Command(click.Command):
    """A command whose help text is its purpose, its options and one example."""

    def __init__(self, *args: Any, example: str = "", **named: Any) -> None:
        super().__init__(*args, **named)
        self.example = example

    def get_help(self, ctx: click.Context) -> str:  # noqa: ARG002
        """The help text of the command."""
        rows = [_option_row(item) for item in self.params if isinstance(item, click.Option)]
        width = max(len(left) for left, _ in rows) + 2
        lines = [f"acsolve {self.name} FILE [options]", "", self.help or "", ""]
        for left, text in rows:
            first, *rest = wrap(text, 78 - width)
            lines += [f"  {left.ljust(width)}{first}", *(" " * (width + 2) + x for x in rest)]
        if self.example:
            lines += ["", f"For example: acsolve {self.name} {self.example}"]
        return "\n".join(lines)


def _option_row(option: click.Option) -> tuple[str, str]:
    name = next(item for item in option.opts if item.startswith("--"))
    place = f" {option.metavar}" if option.metavar else ""
    return f"{name}{place}", option.help or ""


def _show_version(ctx: click.Context, param: click.Parameter, value: bool) -> None:  # noqa: ARG001
    if value:
        from acsolve import __version__

        click.echo(f"acsolve {__version__}")
        ctx.exit()


def _show_help(ctx: click.Context, param: click.Parameter, value: bool) -> None:  # noqa: ARG001
    if value:
        click.echo(ctx.get_help())
        ctx.exit()


def help_option() -> click.Option:
    """The option that shows the help text and ends."""
    return click.Option(
        ["-h", "--help"],
        is_flag=True,
        expose_value=False,
        is_eager=True,
        callback=_show_help,
        help="this text",
    )


def _without_command(ctx: click.Context) -> None:
    if ctx.invoked_subcommand is None:
        click.echo(ctx.get_help())


program = Program(
    name="acsolve",
    invoke_without_command=True,
    add_help_option=False,
    callback=click.pass_context(_without_command),
    params=[
        help_option(),
        click.Option(
            ["--version"], is_flag=True, expose_value=False, is_eager=True, callback=_show_version
        ),
    ],
)
