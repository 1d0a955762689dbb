# SPDX-License-Identifier: Apache-2.0
"""Completion scripts for bash, zsh and fish, made from the registry and the parsers themselves."""

from __future__ import annotations

import argparse

from .arguments import Parser, command_parser, shared_options
from .registry import COMMANDS


def _options(parser: argparse.ArgumentParser) -> list[tuple[str, str, list[str]]]:
    """(option, help, choices) of a parser, long options only."""
    found = []
    for action in parser._actions:
        for word in action.option_strings:
            if word.startswith("--"):
                found.append((word, action.help or "", [str(c) for c in action.choices or ()]))
    return found


def _everywhere() -> list[tuple[str, str, list[str]]]:
    parser = Parser(prog="chronos-acc", add_help=False)
    shared_options(parser)
    return _options(parser)


def script(shell: str) -> str:
    """The script for one shell; put it where the shell looks for completions, or source it."""
    return {"bash": _bash, "zsh": _zsh, "fish": _fish}[shell]()


def _bash() -> str:
    names = " ".join(c.name for c in COMMANDS)
    shared = " ".join(o for o, _, _ in _everywhere())
    lines = ["# chronos-acc completion for bash", "_chronos_acc() {", '  local word="${COMP_WORDS[COMP_CWORD]}" last="${COMP_WORDS[COMP_CWORD-1]}" name="" w', "  COMPREPLY=()",
             '  for w in "${COMP_WORDS[@]:1:COMP_CWORD-1}"; do case " ' + names + ' " in *" $w "*) name="$w"; break;; esac; done', '  case "$last" in']  # fmt: skip
    choices = {o: c for o, _, c in _everywhere() if c}
    for option, allowed in choices.items():
        lines.append(f'    {option}) COMPREPLY=($(compgen -W "{" ".join(allowed)}" -- "$word")); return;;')
    lines += ["  esac", f'  local options="{shared}"', '  case "$name" in', f'    "") options="$options {names} --version --completion --check-install --help";;']
    for entry in COMMANDS:
        own = " ".join(o for o, _, _ in _options(command_parser(entry, entry.load())) if o not in shared.split())
        lines.append(f'    {entry.name}) options="$options {own}";;')
    lines += ["  esac", '  if [[ "$word" == -* || -z "$name" ]]; then COMPREPLY=($(compgen -W "$options" -- "$word")); fi', "}",
              "complete -o default -F _chronos_acc chronos-acc", ""]  # fmt: skip
    return "\n".join(lines)


def _quoted(text: str) -> str:
    return "'" + text.replace("'", "'\\''") + "'"


def _zsh() -> str:
    lines = ["#compdef chronos-acc", "# chronos-acc completion for zsh", "_chronos_acc() {", "  local -a commands", "  commands=("]
    lines += [f"    {_quoted(c.name + ':' + c.summary.replace(':', ' -'))}" for c in COMMANDS]
    lines += ["  )", "  if (( CURRENT == 2 )); then _describe command commands; return; fi", '  case "${words[2]}" in']
    for entry in COMMANDS:
        options = _options(command_parser(entry, entry.load()))
        words = " ".join(_quoted(o) for o, _, _ in options)
        lines.append(f"    {entry.name}) compadd -- {words};;")
    lines += ["  esac", "  _files", "}", '_chronos_acc "$@"', ""]
    return "\n".join(lines)


def _fish() -> str:
    lines = ["# chronos-acc completion for fish"]
    for c in COMMANDS:
        lines.append(f"complete -c chronos-acc -n __fish_use_subcommand -a {c.name} -d {_quoted(c.summary)}")
    for option, about, allowed in _everywhere():
        tail = f" -xa {_quoted(' '.join(allowed))}" if allowed else ""
        lines.append(f"complete -c chronos-acc -l {option[2:]} -d {_quoted(about)}{tail}")
    shared = {o for o, _, _ in _everywhere()} | {"--help"}
    for entry in COMMANDS:
        for option, about, _ in _options(command_parser(entry, entry.load())):
            if option not in shared:
                lines.append(f"complete -c chronos-acc -n '__fish_seen_subcommand_from {entry.name}' -l {option[2:]} -d {_quoted(about)}")
    return "\n".join([*lines, ""])
