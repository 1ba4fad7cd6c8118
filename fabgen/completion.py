"""Shell completion scripts, made from the command line's own parser so that they cannot fall behind.

Depends on: nothing.
"""

from __future__ import annotations

import argparse
from collections.abc import Iterator, Mapping, Sequence

SHELLS = ("bash", "zsh", "fish")


def completion_script(shell: str, parser: argparse.ArgumentParser, words: Mapping[str, Sequence[str]]) -> str:
    """The script for one shell; ``words`` gives what may follow an option or a command's first argument."""
    commands = {name: sorted(options_of(sub)) for name, sub in commands_of(parser)}
    if shell == "fish":
        return _fish(commands, words)
    script = _bash(commands, words)
    return f"autoload -U +X bashcompinit && bashcompinit\n{script}" if shell == "zsh" else script


def commands_of(parser: argparse.ArgumentParser) -> Iterator[tuple[str, argparse.ArgumentParser]]:
    """The commands of a parser, each with its own parser."""
    for action in parser._actions:
        if isinstance(action, argparse._SubParsersAction):
            yield from action.choices.items()


def options_of(parser: argparse.ArgumentParser) -> Iterator[str]:
    """The long options of a parser."""
    for action in parser._actions:
        yield from (option for option in action.option_strings if option.startswith("--"))


def _bash(commands: Mapping[str, Sequence[str]], words: Mapping[str, Sequence[str]]) -> str:
    follow = "\n".join(
        f'        {name}) COMPREPLY=($(compgen -W "{" ".join(values)}" -- "$word")); return ;;'
        for name, values in words.items()
    )
    options = "\n".join(f'        {name}) options="{" ".join(values)}" ;;' for name, values in commands.items())
    return f"""_fabgen() {{
    local word="${{COMP_WORDS[COMP_CWORD]}}" before="${{COMP_WORDS[COMP_CWORD-1]}}" options=""
    if [ "$COMP_CWORD" -eq 1 ]; then
        COMPREPLY=($(compgen -W "{" ".join(commands)} --help --version" -- "$word")); return
    fi
    case "$word" in -*) ;; *) case "$before" in
{follow}
    esac ;; esac
    case "${{COMP_WORDS[1]}}" in
{options}
    esac
    case "$word" in
        -*) COMPREPLY=($(compgen -W "$options" -- "$word")) ;;
        *) COMPREPLY=($(compgen -f -- "$word")) ;;
    esac
}}
complete -o filenames -F _fabgen fabgen
"""


def _fish(commands: Mapping[str, Sequence[str]], words: Mapping[str, Sequence[str]]) -> str:
    lines = [f"complete -c fabgen -n __fish_use_subcommand -a '{' '.join(commands)}'"]
    for name, options in commands.items():
        lines += [
            f"complete -c fabgen -n '__fish_seen_subcommand_from {name}' -l {option.removeprefix('--')}"
            + (f" -x -a '{' '.join(words[option])}'" if option in words else "")
            for option in options
        ]
        if name in words:
            lines.append(f"complete -c fabgen -n '__fish_seen_subcommand_from {name}' -a '{' '.join(words[name])}'")
    return "\n".join(lines) + "\n"
