"""The command line: one file a command, loaded when it is called."""

import gc
import os
import sys
from importlib import import_module

import click

from workbench.errors import WorkbenchError

COMMANDS = {
    "new": "Write a commented experiment file.",
    "check": "Read an experiment file and show its conditions and true quantities; run nothing.",
    "run": "Simulate what is missing, write tables and report, print the decision.",
    "status": "Show how far a result is.",
    "report": "Write tables, report and figures of a result again.",
    "decide": "Apply the criteria to a result.",
    "methods": "List the methods, what each tests and assumes, and its source.",
}
"""The commands and what each does, so that --help need not load them."""


class Commands(click.Group):
    """The commands, each loaded from its own file."""

    def list_commands(self, context):
        return list(COMMANDS)

    def get_command(self, context, name):
        if name not in COMMANDS:
            return None
        # Nothing that is loaded here will ever be given back, so looking for it only takes time.
        gc.disable()
        command = import_module(f"workbench.cli.{name}").command
        gc.enable()
        return command

    def resolve_command(self, context, args):
        if args and args[0] not in COMMANDS and not args[0].startswith("-"):
            from workbench.errors import suggestion

            context.fail(f"no command is called '{args[0]}'; {suggestion(args[0], COMMANDS)}")
        return super().resolve_command(context, args)

    def format_commands(self, context, formatter):
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.command(
    cls=Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 110}
)
@click.version_option(package_name="workbench", message="workbench %(version)s")
def workbench():
    """Choose the test for comparing several groups before the data come, and prove the choice.

    An experiment file says what the data may be like and which methods compete; `workbench run` judges them all on
    the same simulated data. Start with: workbench new my_study
    """


def main():
    """Run a command; every way it can end becomes an exit status, and no traceback reaches a user."""
    # More threads inside one process would compete with the workers.
    for name in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "OMP_NUM_THREADS"):
        os.environ.setdefault(name, "1")
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            # A terminal that knows few letters shows a question mark rather than nothing at all.
            stream.reconfigure(errors="replace")
    sys.exit(status_of(workbench))


def status_of(command, args=None):
    """The exit status of a command line."""
    try:
        return command.main(args=args, standalone_mode=False) or 0
    except click.exceptions.Exit as stop:
        return stop.exit_code
    except click.ClickException as error:
        error.show()
        return 2
    except WorkbenchError as error:
        click.echo(str(error), err=True)
        return error.status
    except (KeyboardInterrupt, click.Abort):
        click.echo(
            "\nInterrupted; what was finished is kept, and the same command goes on from there.", err=True
        )
        return 130
    except BrokenPipeError:
        # The reader of our output is gone, as with `| head`; keep the interpreter from complaining about it.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 1
    except Exception as error:
        if os.environ.get("WORKBENCH_TRACEBACK"):
            raise
        click.echo(
            f"A fault of this program: {type(error).__name__}: {error}. Set WORKBENCH_TRACEBACK=1 to see where.",
            err=True,
        )
        return 1
