"""`patlint completion`: the script with which a shell completes commands, options and their words.

The script is made from the parsers of the commands, so it says what this patlint takes; whoever keeps it in a file
makes it anew after an update. Each shell gets the same table: for every command its options, and for every option
that takes one of a few words these words. Where anything else is due, the shell's own completion of file names
stands in.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Final

from patlint.cli.arguments import OneOf, Parser, one_of
from patlint.cli.screen import output

SHELLS: Final = ("bash", "zsh", "fish")


@dataclass(frozen=True, slots=True)
class Option:
    """`--name`: what it is for, whether a value follows, and the words that the value may be."""

    name: str
    says: str
    takes: bool
    words: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Command:
    """A command with its options; `words` may stand as its first argument."""

    name: str
    says: str
    options: tuple[Option, ...]
    words: tuple[str, ...]
    files: bool


def parser() -> Parser:
    """The arguments of the command."""
    made = Parser(
        "completion",
        "SHELL",
        "Give the script with which a shell completes patlint's commands, options and\n"
        "rules.\n\n"
        "bash   source <(patlint completion bash)\n"
        "zsh    source <(patlint completion zsh)       behind compinit\n"
        "fish   patlint completion fish | source",
    )
    made.add_argument("shell", type=one_of(*SHELLS), metavar="SHELL", help="bash, zsh or fish")
    return made


def run(given: Sequence[str]) -> int:
    """Run the command; the exit status."""
    options = parser().read(given)
    script = {"bash": _bash, "zsh": _zsh, "fish": _fish}[options.shell]
    lines = list(script(commands()))
    with output() as write:
        for line in lines:
            write(line + "\n")
    return 0


def commands() -> tuple[Command, ...]:
    """Every command with its options, as their parsers have them."""
    from importlib import import_module

    from patlint.cli.main import COMMANDS

    return tuple(
        _command(name, says, import_module(f"patlint.cli.{name}").parser()) for name, says in COMMANDS.items()
    )


def _command(name: str, says: str, made: Parser) -> Command:
    options: list[Option] = []
    words: tuple[str, ...] = ()
    files = False
    for action in made._actions:
        takes = action.nargs != 0
        choice = _words(action.metavar, action.type)
        if action.option_strings:
            text = (action.help or "").split(" (default")[0]
            options += [
                Option(each, text, takes, choice) for each in action.option_strings if each.startswith("--")
            ]
        else:
            words += choice
            files |= action.metavar == "PATHS"
    return Command(name, says, tuple(options), words, files)


def _words(metavar: object, type_: object) -> tuple[str, ...]:
    from patlint.rules.registry import NAMES
    from patlint.target import TARGETS, target_name

    if isinstance(type_, OneOf):
        return type_.words
    match metavar:
        case "RULE":
            return NAMES
        case "VERSION":
            return tuple(target_name(each) for each in TARGETS)
        case _:
            return ()


def _bash(table: Sequence[Command]) -> Iterator[str]:
    yield from (
        "# patlint's words for bash.",
        "_patlint() {",
        "  local word=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]} kept= words=",
        "  [[ $word == = ]] && word= || { [[ $before == = ]] && before=${COMP_WORDS[COMP_CWORD-2]}; }",
        "  COMPREPLY=()",
        "  if (( COMP_CWORD == 1 )); then",
        f'    words="{" ".join(_first(table))}"',
        "  else",
        '    case "${COMP_WORDS[1]} $before" in',
    )
    for command in table:
        for option in command.options:
            if option.takes:
                yield f'      "{command.name} {option.name}") words="{" ".join(option.words)}" ;;'
    yield '      *) case "${COMP_WORDS[1]}" in'
    for command in table:
        names = " ".join(option.name for option in command.options)
        yield f'        {command.name}) if [[ $word == -* ]]; then words="{names}"'
        if command.words:
            yield f'          elif (( COMP_CWORD == 2 )); then words="{" ".join(command.words)}"'
        yield "          fi ;;"
    yield from (
        "      esac ;;",
        "    esac",
        "  fi",
        "  [[ $word == *,* ]] && kept=${word%,*},",
        '  [[ -n $words ]] && COMPREPLY=($(compgen -P "$kept" -W "$words" -- "${word##*,}"))',
        "}",
        "complete -o bashdefault -o default -F _patlint patlint",
    )


def _zsh(table: Sequence[Command]) -> Iterator[str]:
    yield from (
        "# patlint's words for zsh.",
        "_patlint() {",
        "  local before=${words[CURRENT-1]}",
        "  local -a choice",
        "  if (( CURRENT == 2 )); then",
        f"    choice=({' '.join(_quoted(f'{each.name}:{each.says}') for each in table)})",
        "    _describe command choice",
        "    [[ $PREFIX == -* ]] && compadd -- --help --version",
        "    return",
        "  fi",
        "  compset -P '--*='  && before=${words[CURRENT]%%=*}",
        '  case "${words[2]} $before" in',
    )
    for command in table:
        for option in command.options:
            if option.takes:
                follow = f"compset -P '*,'; compadd -- {' '.join(option.words)}" if option.words else "_files"
                yield f'    ("{command.name} {option.name}") {follow}; return ;;'
    yield from ("  esac", '  case "${words[2]}" in')
    for command in table:
        names = " ".join(_quoted(f"{option.name}:{option.says}") for option in command.options)
        yield f"    ({command.name})"
        yield f"      if [[ $PREFIX == -* ]]; then choice=({names}); _describe option choice"
        if command.words:
            yield f"      elif (( CURRENT == 3 )); then compadd -- {' '.join(command.words)}"
        yield "      else _files; fi ;;" if command.files else "      fi ;;"
    yield from ("  esac", "}", "compdef _patlint patlint")


def _fish(table: Sequence[Command]) -> Iterator[str]:
    yield "# patlint's words for fish."
    yield "complete -c patlint -f -n '__fish_use_subcommand' -l help -d 'the commands'"
    yield "complete -c patlint -f -n '__fish_use_subcommand' -l version -d 'the version'"
    for command in table:
        yield (
            f"complete -c patlint -f -n '__fish_use_subcommand' -a {command.name} -d {_fish_quoted(command.says)}"
        )
    for command in table:
        here = f"complete -c patlint -n '__fish_seen_subcommand_from {command.name}'"
        yield f"{here} {'-F' if command.files else '-f'}"
        if command.words:
            yield f"{here} -a {_fish_quoted(' '.join(command.words))}"
        for option in command.options:
            takes = (
                f" -x -a {_fish_quoted(' '.join(option.words))}" if option.words else " -r"
            ) * option.takes
            yield f"{here} -l {option.name[2:]}{takes} -d {_fish_quoted(option.says)}"


def _first(table: Sequence[Command]) -> list[str]:
    return [each.name for each in table] + ["--help", "--version"]


def _quoted(text: str) -> str:
    """A word for zsh; a colon in the part before the first one would end it, and none has one."""
    return "'" + text.replace("'", "'\\''") + "'"


def _fish_quoted(text: str) -> str:
    return "'" + text.replace("\\", "\\\\").replace("'", "\\'") + "'"
