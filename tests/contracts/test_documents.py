"""What the documentation promises: its commands, its links, its console blocks, its pages taken from the program, its examples."""

import doctest
import importlib
import pkgutil
import re
import tomllib
from pathlib import Path

import pytest

import traverse
from tests.tools import write_docs
from traverse.cli import main
from traverse.quantities import QUANTITIES

ROOT = Path(__file__).parents[2]
COMMANDS = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["tool"]["traverse"]["readme"]
PAGES = {str(page.relative_to(ROOT)): page for page in write_docs.pages()}
BLOCKS = {
    f"{name}:{number}": block for name, page in PAGES.items()
    for number, block in enumerate(write_docs.blocks(page.read_text(encoding="utf-8")), start=1)
}
_LINK = re.compile(r"!?\[[^\]]*\]\(([^)\s]+)(?:\s+\"[^\"]*\")?\)")
_FENCE = re.compile(r"^(```|~~~).*?^\1[ \t]*$", re.M | re.S)


def text_of(name):
    return PAGES[name].read_text(encoding="utf-8")


# --- the two commands

@pytest.mark.parametrize("name", ["main-job", "tests"])
def test_the_readme_has_the_command(name):
    """Word for word, on a line of its own, ready to be copied."""
    assert COMMANDS[name] in text_of("README.md").splitlines()


def test_the_checks_run_the_readmes_commands():
    """They are read from where they stand, so that what is run cannot differ from what is printed."""
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    for name in ("main-job", "tests"):
        assert f"$(readme_command {name})" in script
    assert 'tomllib.load(open("pyproject.toml", "rb"))["tool"]["traverse"]["readme"]' in script


def test_the_readmes_command_names_an_example():
    words = COMMANDS["main-job"].split()
    assert (ROOT / words[words.index("reduce") + 1]).is_file()


# --- links

def anchors(text):
    """Return the anchors of a page's headings, as the usual viewers make them."""
    heads = re.findall(r"^#{1,6} +(.+?) *$", _FENCE.sub("", text), re.M)
    return {re.sub(r"[^\w\- ]", "", re.sub(r"[`*]", "", head)).strip().lower().replace(" ", "-") for head in heads}


@pytest.mark.parametrize("name", PAGES)
def test_links_lead_somewhere(name):
    broken = []
    for target in _LINK.findall(_FENCE.sub("", text_of(name))):
        if re.match(r"[a-z]+:", target):
            continue
        path, _, anchor = target.partition("#")
        place = (PAGES[name].parent / path).resolve() if path else PAGES[name]
        there = place.exists() and place.is_relative_to(ROOT)
        if not there or (anchor and place.suffix == ".md" and anchor not in anchors(place.read_text(encoding="utf-8"))):
            broken.append(target)
    assert not broken


def test_every_page_is_reached_from_the_readme():
    """A page nobody links to is not read."""
    seen, waiting = set(), ["README.md"]
    while waiting:
        name = waiting.pop()
        if name in seen:
            continue
        seen.add(name)
        for target in _LINK.findall(_FENCE.sub("", text_of(name))):
            place = (PAGES[name].parent / target.partition("#")[0]).resolve()
            if place.is_relative_to(ROOT) and str(place.relative_to(ROOT)) in PAGES:
                waiting.append(str(place.relative_to(ROOT)))
    assert seen == set(PAGES)


# --- console blocks

@pytest.mark.parametrize("place", BLOCKS)
def test_console_blocks_show_what_the_program_says(place):
    now = write_docs.replay(BLOCKS[place])
    assert write_docs.agrees(BLOCKS[place], now), now


def test_there_are_console_blocks():
    assert BLOCKS


def test_a_false_number_in_a_console_block_is_seen():
    block = "$ traverse --version\n"
    true = write_docs.replay(block)
    assert true == f"$ traverse --version\ntraverse {traverse.__version__}\n"
    assert write_docs.agrees(true, true)
    assert not write_docs.agrees(true.replace(traverse.__version__, "9.9.9"), true)
    assert not write_docs.agrees(block, true), "output left out is seen"
    assert write_docs.agrees(block + "...\n", true)
    assert not write_docs.agrees(block + "...\nand more\n", true)
    assert write_docs.replay("$ traverse reduce none.toml\n$ echo $?\n").endswith("$ echo $?\n1\n")


def test_refilling_changes_only_what_disagrees():
    page = "a\n```console\n$ x\n1\n```\nb\n```console\n$ y\n...\n```\n```sh\n$ z\n```\n"
    assert write_docs.refilled(page, lambda block: block[:4] + "2\n") == page.replace("$ x\n1", "$ x\n2")
    with pytest.raises(ValueError, match="rm"):
        write_docs.replay("$ rm -r readings\n")


# --- pages taken from the program

@pytest.mark.parametrize(("name", "page"), [("docs/commands.md", write_docs.commands), ("docs/nomenclature.md", write_docs.nomenclature)])
def test_pages_from_the_program_are_up_to_date(name, page):
    """Cure: ``python -m tests.tools.write_docs``."""
    assert text_of(name) == page()


def test_the_pages_have_every_command_and_quantity():
    commands, nomenclature = write_docs.commands(), write_docs.nomenclature()
    for name, command in main.commands.items():
        assert f"## traverse {name}\n" in commands
        for parameter in command.params:
            assert all(option in commands for option in parameter.opts if option.startswith("-"))
    for quantity in QUANTITIES:
        assert f"| `{quantity.name}` |" in nomenclature
        assert quantity.meaning in nomenclature


# --- examples in docstrings

MODULES = ["traverse", *(entry.name for entry in pkgutil.walk_packages(traverse.__path__, "traverse.") if entry.name != "traverse.__main__")]


def test_examples_in_docstrings_hold():
    results = [doctest.testmod(importlib.import_module(name)) for name in MODULES]
    assert sum(result.failed for result in results) == 0
    assert sum(result.attempted for result in results) > 0
