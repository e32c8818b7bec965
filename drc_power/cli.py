"""The commands: arguments in, files and an exit status out. What they do is done elsewhere."""

from __future__ import annotations

import argparse
import contextlib
import datetime
import os
import sys
from collections.abc import Callable, Iterable, Iterator, Sequence

from . import __version__
from .faults import Fault, InputError, Mark

OK, FINDINGS, NO_CHECK, OWN_FAULT = 0, 1, 2, 70
FAILING = ("close", "unproven", "exceeded")


class Arguments(argparse.ArgumentParser):
    """Says what is wrong with a command line in one line."""

    def error(self, message: str) -> None:
        self.exit(NO_CHECK, f"{self.prog}: {message}; see {self.prog} --help\n")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command. Returns the exit status; no traceback ever reaches the user."""
    options = build_parser().parse_args(arguments)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            # A terminal without the signs of a table shows others instead of ending the run.
            stream.reconfigure(errors="replace")
    try:
        return options.run(options)
    except InputError as error:
        sys.stderr.write("".join(f"{_one_line(fault)}\n" for fault in error.faults))
        return NO_CHECK
    except BrokenPipeError:
        # Whoever read our output has seen enough; python must not complain at exit either.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return OK
    except KeyboardInterrupt:
        sys.stderr.write("drc-power: stopped; nothing was written\n")
        return NO_CHECK
    except (Exception, RecursionError) as error:  # noqa: BLE001  the last resort that keeps tracebacks from users
        if os.environ.get("DRC_POWER_TRACEBACK"):
            raise
        sys.stderr.write(f"drc-power: a fault of the tool itself ({_one_line(type(error).__name__)}: {_one_line(error)}); "
                         "please report it with the files that caused it\n")
        return OWN_FAULT


def _one_line(text: object) -> str:
    from .text import printable, shorten

    return shorten(printable(str(text)), 600)


def build_parser() -> argparse.ArgumentParser:
    """The command line."""
    parser = Arguments(prog="drc-power", description="Checks the power paths of a KiCad board: safe operating area, "
                       "junction temperature, derating.", allow_abbrev=False)
    parser.add_argument("--version", action="version", version=f"drc-power {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True, parser_class=Arguments)
    _survey_arguments(commands)
    _check_arguments(commands)
    _compare_arguments(commands)
    _workings_arguments(commands)
    _rules_arguments(commands)
    _envelope_arguments(commands)
    _size_arguments(commands)
    return parser


def _command(commands, name: str, run: Callable, text: str) -> argparse.ArgumentParser:
    command = commands.add_parser(name, help=text, description=text, allow_abbrev=False)
    command.set_defaults(run=run)
    return command


def _survey_arguments(commands) -> None:
    command = _command(commands, "survey", survey, "find rails, grounds and power paths, with no annotation at all")
    command.add_argument("netlist", metavar="NETLIST")
    command.add_argument("--json", action="store_true", help="print only JSON on standard output")
    command.add_argument("--draft", metavar="FILE.power.yaml", type=_file, help="write first annotations and device data, or add what is new")
    command.add_argument("--mermaid", metavar="FILE.md", help="write the power tree as Mermaid in Markdown; - is standard output")
    command.add_argument("--dot", metavar="FILE.dot", help="write the power tree for Graphviz; - is standard output")


def _check_arguments(commands) -> None:
    command = _command(commands, "check", check, "check a board against its device data and house rules")
    command.add_argument("file", metavar="FILE.power.yaml")
    command.add_argument("--json", metavar="FILE", help="write the findings as JSON; - is standard output")
    command.add_argument("--markdown", metavar="FILE", help="write the findings as Markdown; - is standard output")
    command.add_argument("--confirm-netlist", action="store_true", help="read the netlist with a second, independent reader too")
    command.add_argument("--self-check", action="store_true", help="verify current and power balance of every solved point")
    command.add_argument("--samples", metavar="N", type=_count, default=0, help="random samples of all spans in each mode")
    command.add_argument("--seed", metavar="S", type=_count, default=0, help="the same seed gives the same samples")
    command.add_argument("--distribution", choices=("uniform", "normal"), default="uniform",
                         help="how samples fill a span; normal takes it as plus and minus three sigma")
    command.add_argument("--fails-from", choices=FAILING, help="the mildest verdict that fails the run")
    command.add_argument("--today", metavar="DATE", type=_date, help="the date that waivers are held against, YYYY-MM-DD")


def _compare_arguments(commands) -> None:
    command = _command(commands, "compare", compare, "what a revision changed, from two findings JSON files")
    command.add_argument("base", metavar="BASE.json")
    command.add_argument("head", metavar="HEAD.json")
    command.add_argument("--markdown", metavar="FILE", help="write the comparison as Markdown; - is standard output")


def _workings_arguments(commands) -> None:
    command = _command(commands, "workings", workings, "the calculation behind every finding on one part")
    command.add_argument("file", metavar="FILE.power.yaml")
    command.add_argument("ref", metavar="REF")


def _envelope_arguments(commands) -> None:
    command = _command(commands, "envelope", envelope, "a part's safe-area chart with its operating points and events")
    command.add_argument("file", metavar="FILE.power.yaml")
    command.add_argument("ref", metavar="REF")
    command.add_argument("-o", "--output", metavar="FILE.svg", type=_chart_file, required=True, help="a file that ends in .svg or .png")


def _rules_arguments(commands) -> None:
    command = _command(commands, "rules", rules, "the rules in force and where each comes from")
    command.add_argument("file", metavar="FILE.power.yaml")


def _size_arguments(commands) -> None:
    command = _command(commands, "size", size, "what would make a part pass: sink, load current or ambient allowed")
    command.add_argument("file", metavar="FILE.power.yaml")
    command.add_argument("ref", metavar="REF")


def _file(text: str) -> str:
    if text in ("", "-"):
        raise argparse.ArgumentTypeError(f"{text!r} is no file that can be written again, name one")
    return text


def _chart_file(text: str) -> str:
    if not text.lower().endswith((".svg", ".png")):
        raise argparse.ArgumentTypeError(f"{text!r} does not say the kind of chart, end it in .svg or .png")
    return text


def _date(text: str) -> str:
    try:
        return datetime.date.fromisoformat(text).isoformat()
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} is no date, write YYYY-MM-DD") from None


def _count(text: str) -> int:
    if not text.isascii() or not text.isdigit() or len(text) > 9:
        raise argparse.ArgumentTypeError(f"{text[:40]!r} is no count, write a whole number such as 10000")
    return int(text)


def survey(options) -> int:
    """`drc-power survey`."""
    from .netlist.schematic import read_board_netlist
    from .survey import survey_netlist
    from .survey.show import survey_json, survey_text
    from .survey.trees import dot_text, mermaid_text

    outputs = [options.mermaid, options.dot, options.draft, "-" if options.json else None]
    netlist = read_board_netlist(options.netlist)
    found = survey_netlist(netlist)
    wanted = [(options.mermaid, mermaid_text), (options.dot, dot_text)]
    texts = {path: writer(found, netlist) for path, writer in wanted if path}
    drafted, notes = _drafted(found, netlist, options.draft)
    if twice := next((path for path in outputs if path and path != "-" and outputs.count(path) > 1), None):
        raise InputError(Fault(Mark(twice), "two outputs go to this file", "give each a file of its own"))
    with _folders_for(drafted):
        to_stdout = _deliver(texts | drafted, outputs)
    if options.json:
        import json

        sys.stdout.write(json.dumps(survey_json(found), indent=1, ensure_ascii=True) + "\n")
    elif not to_stdout:
        sys.stdout.write(survey_text(found, netlist) + "\n" * bool(notes))
    (sys.stderr if options.json or to_stdout else sys.stdout).write("".join(f"{note}\n" for note in notes))
    return OK


def _drafted(found, netlist, path: str | None) -> tuple[dict[str, str], list[str]]:
    """The files of a draft, if one is asked for, and what to tell of it."""
    if path is None:
        return {}, []
    from .draft import make_draft

    draft = make_draft(found, netlist, path)
    return draft.files, draft.notes


@contextlib.contextmanager
def _folders_for(paths: Iterable[str]) -> Iterator[None]:
    """Make the folders that files go into, and take them away again if the files cannot be written."""
    missing = [folder for folder in dict.fromkeys(map(os.path.dirname, paths)) if folder and not os.path.lexists(folder)]
    for folder in missing:
        with contextlib.suppress(OSError):
            os.mkdir(folder)
    try:
        yield
    except BaseException:
        for folder in missing:
            with contextlib.suppress(OSError):
                os.rmdir(folder)
        raise


def check(options) -> int:
    """`drc-power check`."""
    from .findings.verdict import exit_status
    from .report.json_writer import to_json
    from .report.markdown import to_markdown
    from .report.terminal import to_table
    from .run import Run, check as run_check

    run = Run(options.today, _progress, options.confirm_netlist, options.self_check, options.samples, options.seed,
              options.distribution, options.fails_from)
    result = run_check(options.file, run)
    _progress("")
    sys.stderr.write("".join(f"{remark}\n" for remark in run.remarks))
    wanted = [(options.json, to_json), (options.markdown, to_markdown)]
    to_stdout = _deliver({path: writer(result) for path, writer in wanted if path}, [path for path, _ in wanted])
    if not to_stdout:
        sys.stdout.write(to_table(result, _width(), _colour()))
    return exit_status(result)


def compare(options) -> int:
    """`drc-power compare`."""
    from .findings.compare import compare as compare_results
    from .report.comparison import comparison_markdown, comparison_table
    from .report.json_reader import load_result

    base, head = (load_result(_text_of(path), path) for path in (options.base, options.head))
    comparison = compare_results(base, head)
    texts = {options.markdown: comparison_markdown(comparison)} if options.markdown else {}
    if not _deliver(texts, [options.markdown]):
        sys.stdout.write(comparison_table(comparison, _width(), _colour()))
    return OK


def workings(options) -> int:
    """`drc-power workings`."""
    from .report.workings import workings_text
    from .run import check as run_check

    result = run_check(options.file)
    _refuse_unknown(options.file, options.ref, sorted({f.ref for f in result.findings if f.ref}))
    sys.stdout.write(workings_text(result, options.ref))
    return OK


def envelope(options) -> int:
    """`drc-power envelope`."""
    from .charting import safe_area_chart
    from .report.charts.safe_area import draw
    from .report.write import write_files
    from .run import Run, read_board

    board, _, _ = read_board(options.file, Run())
    if options.ref not in board.elements:
        from .intake.suggest import nearest

        raise InputError(Fault(Mark(options.file), f"there is no power element {options.ref!r}", nearest(options.ref, board.elements)))
    chart = safe_area_chart(board, options.ref)
    try:
        drawn = draw(chart, options.output.rpartition(".")[2].lower())
    except ImportError:
        raise InputError(Fault(Mark(options.output), "charts need matplotlib, which is not installed",
                               "install drc_power with its extra: report")) from None
    write_files({options.output: drawn})
    return OK


def rules(options) -> int:
    """`drc-power rules`."""
    from .report.rules_table import rules_text
    from .run import rules_in_force

    sys.stdout.write(rules_text(rules_in_force(options.file)))
    return OK


def size(options) -> int:
    """`drc-power size`."""
    from .run import Run, read_board
    from .sizing import size_part, sizing_text

    board, _, _ = read_board(options.file, Run())
    _refuse_unknown(options.file, options.ref, board.elements)
    sys.stdout.write(sizing_text(size_part(board, options.ref)))
    return OK


def _refuse_unknown(path: str, ref: str, known: Sequence[str]) -> None:
    if ref not in known:
        from .intake.suggest import nearest

        raise InputError(Fault(Mark(path), f"no part {ref!r} is judged on this board", nearest(ref, known)))


def _deliver(texts: dict[str, str], order: Sequence[str | None]) -> bool:
    """Write the files, all or none; whether anything went to standard output."""
    from .report.write import write_files

    if sum(path == "-" for path in order) > 1:
        raise InputError(Fault(Mark("-"), "two outputs go to standard output", "give one of them a file"))
    write_files({path: text for path, text in texts.items() if path != "-"})
    if "-" in texts:
        if hasattr(sys.stdout, "reconfigure"):
            sys.stdout.reconfigure(encoding="utf-8", newline="\n")
        sys.stdout.write(texts["-"])
    return "-" in texts


def _text_of(path: str) -> str:
    try:
        with open(path, encoding="utf-8") as file:
            return file.read()
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "it is not UTF-8 text"
        raise InputError(Fault(Mark(path), f"cannot be read: {reason.lower()}", "name a findings JSON file of `check --json`")) from None


def _width() -> int:
    import shutil

    return shutil.get_terminal_size((100, 24)).columns


def _colour() -> bool:
    return sys.stdout.isatty() and not os.environ.get("NO_COLOR")


def _progress(text: str) -> None:
    """What is being done, on one line of standard error that the next overwrites; nothing unless it is a terminal."""
    if sys.stderr.isatty():
        sys.stderr.write(f"\r\x1b[K{text}")
        sys.stderr.flush()


if __name__ == "__main__":
    sys.exit(main())
