"""The comment on a pull request: readable, bounded, and literal whatever a netlist calls things.

markdown-it-py, an independent implementation of CommonMark with tables, renders what the writer wrote; the standard
library's HTML parser then sees what a browser would.
"""

import dataclasses
import re
from html.parser import HTMLParser
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from drc_power.findings.model import Coverage, Outside
from drc_power.report.markdown import to_markdown
from drc_power.report.markdown_text import code, prose, table_head, table_row
from drc_power.text import printable, shorten

GOLDEN = Path(__file__).parent / "golden" / "example.md"

OUR_ELEMENTS = set("p strong table thead tbody tr th td details summary ul li code span sub".split())

# What the large platforms turn into links, notifications or pictures wherever it stands outside code.
LIVE = re.compile(r"(?<![\w`])[@#!~$%&](?=[\w\"])|://|www\.|\bGH-\d|:[\w+]+:|\w@\w", re.ASCII)


class Page(HTMLParser):
    """What a browser makes of a page: elements, attributes, text by cell, and text outside code."""

    def __init__(self, html):
        super().__init__()
        self.elements, self.attributes, self.rows, self.outside_code, self._open = [], [], [], "", []
        self.codes = []
        self.feed(html)

    def handle_starttag(self, tag, attrs):
        self.elements.append(tag)
        self.attributes += [name for name, value in attrs if (name, value[:11]) != ("style", "text-align:")]
        self._open.append(tag)
        if tag == "tr":
            self.rows.append([])
        if tag in {"td", "th"}:
            self.rows[-1].append("")
        if tag == "code":
            self.codes.append("")

    def handle_endtag(self, tag):
        assert self._open.pop() == tag

    def handle_data(self, data):
        if "code" in self._open:
            self.codes[-1] += data
        else:
            self.outside_code += data
        if self._open and {"td", "th"} & set(self._open):
            self.rows[-1][-1] += data


@pytest.fixture
def render():
    markdown_it = pytest.importorskip("markdown_it")
    renderer = markdown_it.MarkdownIt("commonmark").enable(["table", "strikethrough"])
    return lambda markdown: Page(renderer.render(markdown))


def test_the_example_reads_as_the_golden_file(example):
    assert to_markdown(example) == GOLDEN.read_text(encoding="utf-8")


def test_the_verdict_comes_first_and_the_gravest_finding_on_top(example):
    lines = to_markdown(example).splitlines()
    assert lines[0].startswith("**Power check: limits exceeded** - 1 exceeded, 1 unproven")
    assert [re.match(r"\| `(\w+)`", line)[1] for line in lines[4:7]] == ["Q3", "Q2", "R12"]


def test_modes_of_one_matter_share_a_row_and_each_has_its_line_to_waive_it(make_result, make_finding):
    hot = [make_finding(mode=mode, verdict="exceeded", value=value, margin=(150.0 - value) / 95.0)
           for mode, value in (("run", 160.0), ("gale", 170.0), ("idle", 155.0))]
    apart = [make_finding(mode="off", verdict="close", margin=0.05),
             make_finding(ref="Q4", uuid="/q4", verdict="close")]
    text = to_markdown(make_result(*hot, *apart))
    row = re.compile(r"^\| `(Q\d)` \| (?:\*\*)?(\w+)\S* .* \| (\w+), .*?((?:; also in .*)?) \|$", re.MULTILINE)
    assert row.findall(text) == [
        ("Q3", "exceeded", "gale", "; also in run, idle"), ("Q3", "close", "off", ""), ("Q4", "close", "run", "")]
    assert all(f"{{finding: {finding.id}, " in text for finding in hot)
    assert text.startswith("**Power check: limits exceeded** - 3 exceeded")


def test_findings_about_no_part_or_net_are_never_taken_for_one(make_result, make_finding):
    fins = [make_finding(id=name, ref=None, uuid="", rule="sink.steady", verdict="exceeded", margin=-0.1) for name in "ab"]
    assert to_markdown(make_result(*fins)).count("| `board` | **exceeded**") == 2


def test_a_board_without_findings_is_not_called_safe(make_result):
    text = to_markdown(make_result(coverage=Coverage(0, 0, (), (), ())))
    assert text.startswith("**Power check: nothing was judged**")
    assert "No power elements were found." in text


def test_a_good_board_says_so_shortly(make_result, make_finding):
    text = to_markdown(make_result(make_finding()))
    assert text.startswith("**Power check: within all limits** - 0 exceeded")
    assert "Nothing needs action." in text
    assert "The one power element was judged." in text


def test_waivers_whose_dates_nobody_judged_are_mentioned(example):
    assert "end dates of waivers were not judged" not in to_markdown(example)
    assert "end dates of waivers were not judged" in to_markdown(dataclasses.replace(example, today=None))


def test_the_example_renders_as_intended(example, render):
    page = render(to_markdown(example))
    assert page.rows[0] == ["Part", "What", "Found", "Allowed", "Margin", "Worst corner"]
    assert page.rows[1] == ["Q3", "exceeded: junction temperature", "163.2 °C", "≤ 150.0 °C", "-13.9 %",
                            "run, ambient 55 °C, +24V 29 V"]
    assert page.elements.count("details") == 3
    assert set(page.elements) <= OUR_ELEMENTS


def test_hostile_text_makes_no_element_cell_attribute_or_live_text(hostile, hostile_result, render):
    page = render(to_markdown(hostile_result))
    assert set(page.elements) <= OUR_ELEMENTS
    assert page.attributes == []
    assert page.elements.count("details") == (3 if hostile else 2)  # no part without a name in the table of parts
    assert {len(row) for row in page.rows} <= {5, 6}
    assert not LIVE.search(page.outside_code), LIVE.search(page.outside_code)
    assert all(c.isprintable() or c == "\n" for c in page.outside_code + "".join(page.codes))


def test_a_hostile_name_appears_literally_in_its_cell(hostile, render):
    page = render("\n".join([*table_head(a="left", b="right"), table_row([code(hostile), "end"])]))
    assert [len(row) for row in page.rows] == [2, 2]
    expected = shorten(printable(hostile), 48)
    assert page.rows[1][0] == (expected if expected.strip() else "(no name)")


def test_a_hostile_sentence_appears_literally_word_by_word(hostile, render):
    page = render("\n".join([*table_head(a="left", b="right"), table_row([prose(hostile), "end"])]))
    cell = page.rows[1][0] if len(page.rows) > 1 else ""
    words = [shorten(word, 64) for word in hostile.split()]
    assert cell == " ".join(shorten(printable(word), 64) for word in words)


def test_an_address_is_split_between_elements_where_a_code_span_has_to_be_html():
    """The published extended autolinks of GitHub's Markdown look for addresses in text, and not across elements."""
    assert code("`user@example&#46;org|") == (
        "<code>&#96;user<span>&#64;</span>example&#38;&#35;46&#59;org&#124;</code>")


MEAN_TEXT = st.text(st.sampled_from("ab1 |`\\<>&*_[]()!~@#$%:./-+=\"'\n\t\u202e^{}GHw"), max_size=30)


@settings(deadline=None)  # the renderer is imported within
@given(MEAN_TEXT, MEAN_TEXT)
def test_whatever_the_text_a_row_keeps_its_cells_and_their_words(name, sentence):
    markdown_it = pytest.importorskip("markdown_it")
    renderer = markdown_it.MarkdownIt("commonmark").enable(["table", "strikethrough"])
    page = Page(renderer.render("\n".join([*table_head(a="left", b="right", c="left"),
                                           table_row([code(name), prose(sentence) or "-", "end"])])))
    assert set(page.elements) <= {"table", "thead", "tbody", "tr", "th", "td", "code", "span"}
    assert len(page.rows[1]) == 3
    assert page.rows[1][0] == (printable(name) if printable(name).strip() else "(no name)")
    assert page.rows[1][1] == (" ".join(map(printable, sentence.split())) or "-")
    assert not LIVE.search(page.outside_code)


@settings(deadline=None)  # the renderer is imported within
@given(MEAN_TEXT)
def test_whatever_the_text_a_list_item_stays_one_paragraph(sentence):
    markdown_it = pytest.importorskip("markdown_it")
    page = Page(markdown_it.MarkdownIt("commonmark").render(f"- {prose(sentence)}\n- end\n"))
    assert [e for e in page.elements if e not in {"code", "span"}] in (["ul", "li", "li"], ["ul", "li", "p", "li", "p"])


def test_names_of_ten_thousand_letters_are_shortened_in_the_middle(hostile_result):
    assert all(len(line) < 25_000 for line in to_markdown(hostile_result).splitlines())


@pytest.mark.parametrize("limit", [30_000, 60_000])
@pytest.mark.parametrize("n_findings", [0, 1, 40, 200, 3_000])
def test_long_results_are_cut_with_a_count(make_result, make_finding, render, n_findings, limit):
    findings = [make_finding(ref=f"Q{i}", uuid=f"u{i}", verdict="exceeded", margin=-0.1, remedy="A bigger sink. " * 8)
                for i in range(n_findings)]
    waived = [make_finding(ref=f"D{i}", uuid=f"d{i}", verdict="waived", was="close") for i in range(n_findings)]
    refs = tuple(f"X{i}" for i in range(n_findings * 5))
    result = make_result(*findings, *waived, notes=tuple(f"Note {i}." for i in range(n_findings * 5)),
                         coverage=Coverage(9, 9, refs, tuple(Outside(r, "because " * 30) for r in refs), refs))
    text = to_markdown(result, limit)
    assert len(text) < limit
    assert text.count("<details>") == text.count("</details>")
    rows = [row for row in render(text).rows if len(row) == 6][1:]
    missing = n_findings - len(rows)
    assert (f"and {missing} more finding{'s' if missing > 1 else ''}, see the JSON" in text) == (missing > 0)
    if n_findings >= 3_000:
        assert len(text) > 0.6 * limit


def test_the_worst_names_still_fit(make_result, make_finding):
    name = "|`" * 5_000
    findings = [make_finding(ref=f"{name}{i}", text=f"{name} " * 50, remedy=name, corner=name, mode=name, quantity=name,
                             verdict=verdict, margin=-0.1) for i in range(100) for verdict in ("exceeded", "waived")]
    result = make_result(*findings, board_name=name, netlist=name, notes=(f"{name} " * 50,) * 30,
                         coverage=Coverage(9, 9, (name,) * 50, (Outside(name, name),) * 50, (name,) * 50))
    assert len(to_markdown(result)) < 60_000


def test_a_finding_just_past_its_limit_does_not_read_as_equal(make_result, make_finding):
    finding = make_finding(verdict="exceeded", value=10.0002, allowed=10.0, margin=-0.00002, unit="A")
    row = next(line for line in to_markdown(make_result(finding)).splitlines() if line.startswith("| `Q3`"))
    assert "10.0002 A | ≤ 10 A | -0.002 %" in row


@pytest.mark.parametrize(
    ("value", "allowed", "margin", "shown"),
    [(3.3, 3.0, 0.1, "≥ 3 V"), (2.7, 3.0, -0.1, "≥ 3 V"), (45.0, 60.0, 0.25, "≤ 60 V"), (60.0, 60.0, 0.0, "60 V"),
     (3.0, None, None, "-"), (float("inf"), 60.0, float("-inf"), "60 V")],
)
def test_the_limit_says_whether_it_is_the_least_or_the_most(make_result, make_finding, value, allowed, margin, shown):
    finding = make_finding(verdict="close", value=value, allowed=allowed, margin=margin, unit="V")
    row = next(line for line in to_markdown(make_result(finding)).splitlines() if line.startswith("| `Q3`"))
    assert row.split(" | ")[3] == shown
