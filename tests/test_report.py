from __future__ import annotations

import json
import re
from dataclasses import replace
from html.parser import HTMLParser

import jsonschema
import pytest
import yaml

import answers
from millreason.knowledge import data_root
from millreason.report import FORMS, Form, render, schema
from millreason.report.markdown import escape_markdown
from millreason.report.page import Item, Items, Section
from millreason.report.words import job_key
from millreason.trace import Answer
from millreason.vocabulary import load_vocabulary

ANSWERS = {
    "recommended": answers.recommended,
    "inches": answers.in_inches,
    "asking": answers.asking,
    "refused": answers.refused,
    "held": answers.held_back,
}
HOSTILE = 'x <b onload="a">|[red]y[/red] `z` *w* ${{7*7}} {{ 7*7 }}\n# head\x1b[31m \u202eabc'
VOID = {"meta", "link", "br"}


@pytest.fixture(params=ANSWERS)
def answer(request: pytest.FixtureRequest) -> Answer:
    return ANSWERS[request.param]()


def hostile() -> Answer:
    plan = replace(answers.PLAN, position=HOSTILE)
    caution = replace(answers.CAUTIONS[1], text=HOSTILE, do=HOSTILE)
    firing = replace(answers.FIRINGS[0], says=HOSTILE, conclusion=HOSTILE)
    material = answers.given("work.material", HOSTILE)
    check = replace(answers.CHECKS[0], name=HOSTILE)
    trace = replace(answers.TRACE, firings=[firing], facts=[material, *answers.FACTS[1:]])
    told = replace(answers.recommended(), job=HOSTILE, file=HOSTILE, summary=HOSTILE, plan=plan, trace=trace)
    return replace(told, cautions=[caution], checks=[check], notes=[HOSTILE], contradictions=[HOSTILE])


class Balanced(HTMLParser):
    """Checks that tags close in order, and gathers their attributes and the ids."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str | None]] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += attrs
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += attrs

    def handle_endtag(self, tag: str) -> None:
        assert self.open, f"</{tag}> closes nothing"
        assert self.open.pop() == tag


def parsed(html: str) -> Balanced:
    parser = Balanced()
    parser.feed(html)
    parser.close()
    assert not parser.open
    return parser


# ---------------------------------------------------------------------- every form
@pytest.mark.parametrize("form", FORMS)
def test_the_same_answer_gives_the_same_bytes(answer: Answer, form: Form) -> None:
    assert render(answer, form) == render(answer, form)


def test_json_follows_the_published_schema(answer: Answer) -> None:
    jsonschema.validate(json.loads(render(answer, "json")), json.loads(schema()))


@pytest.mark.parametrize("form", ["terminal", "html", "markdown"])
def test_every_printed_form_defers_to_codes_limits_and_a_qualified_person(answer: Answer, form: Form) -> None:
    text = " ".join(render(answer, form, full=True).split())
    for words in ("local codes", "limits of the machine and of the tool", "qualified person"):
        assert words in text
    assert answer.knowledge_hash[:16] in text
    assert answer.version in text


@pytest.mark.parametrize("form", ["terminal", "html", "markdown"])
def test_every_rule_that_fired_is_told_with_facts_origin_conclusion_and_ground(form: Form) -> None:
    text = " ".join(render(answers.recommended(), form, full=True, width=2000).replace("\\", "").split())
    for firing in answers.FIRINGS:
        for words in (firing.rule, firing.says, firing.conclusion, firing.why):
            assert words in text
    assert "[given: mill scale]" in text or "work.skin is mill_scale [given]" in text
    assert "recalled: kienzle-victor-1957, table of constants, the shop's own rule" in text.replace("&#39;", "'")
    assert "setup.stiffness is one of normal, stiff [concluded" in text


@pytest.mark.parametrize("form", ["terminal", "html", "markdown"])
def test_full_forms_hold_numbers_with_their_sources_and_calculations(form: Form) -> None:
    text = render(answers.recommended(), form, full=True, width=2000).replace("\\", "")
    for words in ("1780 N/mm2", "machinerys-handbook-31", "cutting_force.net_power", "120 checked", "5184"):
        assert words in text


def test_sections_come_in_the_order_of_an_argument() -> None:
    html = render(answers.recommended(), "html")
    order = re.findall(r'<section id="([a-z-]+)">', html)
    assert order == [
        "sheet", "why", "lost", "margins", "plan", "buying", "assumptions", "notes", "questions", "cautions",
        "given", "rules", "numbers", "calculations", "sources",
    ]  # fmt: skip


def test_an_added_section_stands_behind_the_one_it_names_in_every_form() -> None:
    more = [
        Section("holds", "Holds while", (Items((Item("width 180 to 210 mm"),)),), after="margins"),
        Section("stray", "Stray", (Items((Item("no such place"),)),), after="nowhere"),
    ]
    html = render(answers.recommended(), "html", more=more)
    order = re.findall(r'<section id="([a-z-]+)">', html)
    assert order[order.index("margins") + 1] == "holds"
    assert order[-1] == "stray"
    assert "width 180 to 210 mm" in render(answers.recommended(), "markdown", more=more)
    assert "width 180 to 210 mm" in render(answers.recommended(), "terminal", full=True, more=more)


# ---------------------------------------------------------------------- verdicts
def opening(text: str) -> str:
    return " ".join(text.split())


def test_ask_opens_with_the_questions_numbered_and_gives_no_picks() -> None:
    text = render(answers.asking(), "terminal")
    first, second = text.index("1. Which material is it"), text.index("2. What power has")
    assert first < second
    assert "Why: Speed differs by a factor of five" in text
    assert "SETUP SHEET" not in text
    assert "Cutting data" not in render(answers.asking(), "html")


def test_refuse_names_value_against_limit_and_what_opens_a_way() -> None:
    text = opening(render(answers.refused(), "terminal", width=200))
    assert re.search(r"Outermost diameter above the changer limit 112 95 JDG-001 machine: changer full", text)
    assert "verified: A changer that takes 115 mm with neighbours full" in text
    assert "Load the cutter by hand." in text


def test_a_refusal_without_a_way_says_so() -> None:
    refused = answers.refused()
    assert refused.refusal
    text = render(replace(refused, refusal=replace(refused.refusal, openings=[])), "terminal")
    assert "No single change that was tried opens a way." in text


def test_conditional_puts_the_condition_in_a_box_and_gives_no_cutting_data() -> None:
    text = render(answers.held_back(), "terminal")
    assert text.index("held back until this is confirmed") < text.index("WHAT WAS GIVEN")
    assert "magnesium_fire_controls: yes" in text
    held = replace(answers.held_back(), picks=answers.PICKS, plan=answers.PLAN)
    for form in ("terminal", "html", "markdown"):
        shown = render(held, form, full=True)
        assert "cutting speed vc" not in shown
        assert "856 rpm" not in shown


def test_contradictions_stand_before_everything_else() -> None:
    text = render(replace(answers.recommended(), contradictions=["Cast iron, yet group P."]), "terminal")
    assert text.index("Cast iron, yet group P.") < text.index("SETUP SHEET")


# ---------------------------------------------------------------------- units and words
def test_inches_come_first_with_metric_in_brackets() -> None:
    text = render(answers.in_inches(), "terminal", width=120)
    for words in ("3.15 in (80 mm)", "705 sfm (215 m/min)", "38.4 in/min (975 mm/min)", "75 uin (1.9 um)"):
        assert words in text
    assert "in (" not in render(answers.recommended(), "terminal")


def test_lead_and_kappa_are_always_both_printed() -> None:
    square = replace(answers.PICKS, lead_deg=0.0, kappa_deg=90.0)
    rounded = replace(answers.PICKS, lead_deg=None, kappa_deg=34.0, kappa_note="34 degrees at the top", corner="round")
    for picks, words in (
        (answers.PICKS, "lead 45 deg (kappa 45 deg)"),
        (square, "lead 0 deg (kappa 90 deg)"),
    ):
        assert words in render(replace(answers.recommended(), picks=picks), "terminal")
    told = render(replace(answers.recommended(), picks=rounded), "html")
    assert "34 degrees at the top" in told
    assert "round insert: kappa follows the depth" in told


def test_cautions_come_gravest_first_and_notes_are_named_on_the_sheet() -> None:
    text = render(answers.recommended(), "terminal")
    assert text.index("warning: The cutter nearly") < text.index("caution: Set the first") < text.index("Also noted")
    assert "Also noted under Cautions: chip housekeeping." in text
    full = render(answers.recommended(), "terminal", full=True)
    assert full.index("warning: The cutter", full.index("CAUTIONS")) < full.index("note: Hot chips fly off")


def test_the_stop_sign_gives_the_load_of_the_heaviest_step() -> None:
    # 6.93 / 8.51 and 5.33 / 8.51 in the example
    assert "past 81 % of what the spindle has at this speed: the edges are worn (63 % with sharp edges)" in opening(
        render(answers.recommended(), "terminal")
    )


def test_buying_specification_speaks_iso_13399() -> None:
    text = render(answers.recommended(), "markdown")
    rows = dict(re.findall(r"^\| ([A-Z0-9 ]+) \| [^|]+ \| ([^|]+) \|$", text, re.MULTILINE))
    assert rows["DC"] == "80 mm"
    assert rows["DCX"] == "at most 92 mm"
    assert rows["KAPR"] == rows["PSIR"] == "45 deg"
    assert rows["ZEFP"] == "6"
    assert rows["HAND"] == "R"
    assert rows["APMX"] == "at least 2.5 mm"
    assert rows["RPMX"] == "at least 955 rpm"
    assert rows["GAMP"] == "about +12 deg"
    assert rows["CHW"].startswith("chamfered corner")
    assert "RE" not in rows
    rounded = replace(answers.recommended(), picks=replace(answers.PICKS, corner="radius_0.8", wiper="one"))
    text = render(rounded, "markdown")
    assert "| RE | corner radius | 0.8 mm |" in text
    assert "| BS | wiper edge length | at least 0.9 mm (feed per revolution) |" in text


def test_job_keys_are_those_that_the_job_reader_takes() -> None:
    vocabulary = load_vocabulary(data_root())
    for key, fact in vocabulary.job_keys.items():
        assert job_key(fact) == key


# ---------------------------------------------------------------------- terminal
def test_the_short_form_is_a_page_and_fits_its_width() -> None:
    text = render(answers.recommended(), "terminal", width=80)
    lines = text.splitlines()
    assert max(map(len, lines)) <= 80
    assert len(lines) <= 80
    assert "SETUP SHEET" in text
    assert "EVERY RULE THAT FIRED" not in text


@pytest.mark.parametrize("width", [60, 80, 120])
def test_the_full_form_fits_its_width(answer: Answer, width: int) -> None:
    assert max(map(len, render(answer, "terminal", full=True, width=width).splitlines())) <= width


def test_colour_only_when_asked_for(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("FORCE_COLOR", "1")
    assert "\x1b[" not in render(answers.recommended(), "terminal")
    assert "\x1b[" in render(answers.recommended(), "terminal", colour=True)
    monkeypatch.setenv("NO_COLOR", "1")
    assert "\x1b[" in render(answers.recommended(), "terminal", colour=True)


# ---------------------------------------------------------------------- what a user wrote stays text
def test_hostile_text_stays_text_in_html() -> None:
    html = render(hostile(), "html")
    page = parsed(html)
    assert all(name != "onload" for name, _ in page.attributes)
    assert "&lt;b onload=" in html
    assert "{{ 7*7 }}" in html
    assert "\x1b" not in html
    assert "\u202e" not in html


def test_hostile_text_stays_text_in_markdown() -> None:
    markdown = render(hostile(), "markdown")
    assert "<b" not in markdown.replace("\\<b", "")
    assert "\n# head" not in markdown
    assert not re.search(r"(?<!\\)\[red", markdown)
    for row in re.findall(r"^\|.*work: material.*$", markdown, re.MULTILINE):
        assert len(re.findall(r"(?<!\\)\|", row)) == 3


@pytest.mark.parametrize(
    ("text", "escaped"),
    [
        ("0.8 mm", "0.8 mm"),
        ("1. first", "1\\. first"),
        ("- not a list", "\\- not a list"),
        ("# no head", "\\# no head"),
        ("work.width_mm", "work.width_mm"),
        ("_not_ emphasis*", "\\_not\\_ emphasis\\*"),
        ("a|b<c>[d](e)`f`", "a\\|b\\<c\\>\\[d\\](e)\\`f\\`"),
    ],
)
def test_markdown_escapes_what_would_be_markup_and_nothing_else(text: str, escaped: str) -> None:
    assert escape_markdown(text) == escaped


def test_hostile_text_stays_text_on_the_terminal() -> None:
    text = render(hostile(), "terminal", width=200, full=True)
    assert "[red]y[/red]" in text
    assert "\x1b" not in text
    assert "\u202e" not in text


def test_hostile_text_stays_text_in_the_quote() -> None:
    data = yaml.safe_load(render(hostile(), "quote"))
    assert data["job"].startswith('x <b onload="a">|[red]y[/red]')
    assert "\n" not in data["job"]


# ---------------------------------------------------------------------- html
def test_html_is_one_sound_file_without_scripts_or_links(answer: Answer) -> None:
    html = render(answer, "html")
    page = parsed(html)
    assert not {"script", "link", "img", "iframe"} & set(page.tags)
    assert not [value for name, value in page.attributes if name in ("src", "href")]
    ids = [value for name, value in page.attributes if name == "id"]
    assert len(ids) == len(set(ids))
    labels = [value for name, value in page.attributes if name == "aria-labelledby" and value]
    assert all(part in ids for label in labels for part in label.split())


def test_html_draws_cut_passes_edge_margins_and_drive() -> None:
    html = render(answers.recommended(), "html")
    for name in ("cut", "passes", "edge", "margins", "drive"):
        assert f'id="{name}-title"' in html
    assert "@media print" in html
    assert "<details>" in html


def test_no_drive_curve_is_drawn_where_the_answer_has_none() -> None:
    facts = [record for record in answers.FACTS if record.name != "machine.net_curve"]
    html = render(replace(answers.recommended(), trace=replace(answers.TRACE, facts=facts)), "html")
    assert 'id="drive-title"' not in html


# ---------------------------------------------------------------------- quote
def test_the_quote_block_is_yaml_with_what_an_estimator_needs() -> None:
    data = yaml.safe_load(render(answers.recommended(), "quote"))
    assert data["verdict"] == "recommend_with_warnings"
    assert data["passes_across"] == 4
    assert data["layers_deep"] == 2
    assert data["travel_per_pass_mm"] == [486, 486]
    assert data["feed_min"] == 4.25
    assert data["extra_pass_min"] == 0.5
    assert data["repositions"] == 7
    assert data["time_min_low_likely_high"] == [4.3, 4.75, 6.1]
    assert data["quantity"] == 12
    assert "near changer_diameter" in data["flags"]
    assert "warning atc_diameter_neighbours" in data["flags"]
    assert "fixture.rigidity = normal" in data["assumed"]


@pytest.mark.parametrize(
    ("make", "flag"),
    [
        (answers.asking, "ask work.material"),
        (answers.refused, "limit changer_diameter"),
        (answers.held_back, "confirm confirm.magnesium_fire_controls"),
    ],
)
def test_the_quote_block_flags_what_stops_a_quote(make: object, flag: str) -> None:
    data = yaml.safe_load(render(make(), "quote"))  # type: ignore[operator]
    assert flag in data["flags"]
    assert "time_min_low_likely_high" not in data
