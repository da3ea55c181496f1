"""What a review says of one job: verdicts as `fieldtool verdict` gives them, changes, and figures worth a question."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from importlib.resources import files
from pathlib import Path

import jsonschema
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldtool.answers import Finding, Outcome
from fieldtool.diagnosis.explain import explain
from fieldtool.diagnosis.too_exact import too_exact
from fieldtool.reference.edition import RULE_SET
from fieldtool.rules.engine import Rule, _digest
from fieldtool.rules.facts import Facts as Facts_
from fieldtool.verdict.best import by_way, standing
from fieldtool.verdict.compare import compare, judge
from fieldtool.verdict.contract import contract
from fieldtool.ways.way import every_way
from tests.jobs import SAMPLES, Facts, drop_readings, outlet, row, sample, set_reading
from tests.review.trees import keep_verdict, put, reviewed, rows_of

NAMES = sorted(path.stem for path in SAMPLES.glob("*.json"))


def best_of_all(job, request, reading):
    """The answer that `fieldtool verdict` takes where no way is chosen."""
    answers = compare(job, request, reading)
    return next((item for item in answers if item.applies and item.way != "leave_it"), answers[0])


@given(
    name=st.sampled_from(NAMES),
    test=st.sampled_from(["zs", "r1", "r2", "ln_cross", "le_cross", "r1_r2", "ir_live_e", "polarity", "ze", "rcd_ms"]),
    value=st.sampled_from(["gone", "open", "huge", "as it is"]),
    metres=st.sampled_from([1, 9, 60]),
    kind=st.sampled_from(["twin", "appliance", "joint"]),
)
def test_the_quick_search_finds_the_way_that_judging_them_all_puts_first(
    name: str, test: str, value: str, metres: int, kind: str
) -> None:
    def edit(body: Facts) -> None:
        first = body["requests"][0]
        if first.get("outlets"):
            first["outlets"][0].update(metres=float(metres), kind=kind)
        if value == "gone":
            drop_readings(body, test)
        elif value == "open" and test not in ("polarity",):
            set_reading(body, test, None)
        elif value == "huge" and test not in ("polarity",):
            set_reading(body, test, 95.0)

    job = sample(name, edit)
    for request in job.requests:
        reading = explain(job, request.circuit)
        want, got = best_of_all(job, request, reading), standing(job, request, reading)
        assert (got.way, got.outcome, got.refused) == (want.way, want.outcome, want.refused)
        assert (got.verdict is None) == (want.verdict is None)
        if want.verdict is not None and got.verdict is not None:
            assert got.verdict.findings == want.verdict.findings


WAYS = [way.key for way in every_way()]
ANSWERS = st.sampled_from(["holds", "condition", "broken", "cannot_tell", "not_applicable"])


def made_up_rule(rule_id: str, advice: bool, answers: dict[str, Outcome]) -> Rule:
    """A rule that answers as it is told, way by way, and that a designer may decide."""

    def body(facts: Facts_) -> tuple[Finding, ...]:
        return (Finding(rule_id, answers[facts.way], "1", facts.circuit.id, "made up"),)

    return Rule(rule_id, "1", "Made up.", (), (), True, "made_up", advice, lambda _: True, body)


@given(
    tables=st.lists(st.fixed_dictionaries(dict.fromkeys(WAYS, ANSWERS)), min_size=1, max_size=3),
    advice=st.sets(st.sampled_from([0, 1, 2])),
    decided=st.none() | st.sampled_from([0, 1, 2]),
)
def test_no_way_is_let_go_that_could_have_come_first(
    tables: list[dict[str, Outcome]], advice: set[int], decided: int | None
) -> None:
    """Rules that answer anything at all, advice and a designer's decision among them, against judging every way."""
    rules = tuple(made_up_rule(f"rule_{n}", n in advice, table) for n, table in enumerate(tables))
    broken = Finding("", "broken", "1", "c3", "made up")

    def decide(body: Facts) -> None:
        if decided is not None:
            body["overrides"] = [
                {"id": "d1", "request": "q1", "rule": f"rule_{decided}", "place": "c3", "rule_set": RULE_SET,
                 "figures": _digest(f"rule_{decided}", broken), "by": "e2", "reason": "seen",
                 "at": "2026-12-01T09:00:00Z"}
            ]  # fmt: skip

    job = sample("larch_row", decide)
    reading = explain(job, "c3")
    with pytest.MonkeyPatch.context() as patch:
        for module in ("fieldtool.rules.engine", "fieldtool.verdict.best", "fieldtool.verdict.headroom"):
            patch.setattr(f"{module}.catalogue", lambda: rules)
        want, got = best_of_all(job, job.requests[0], reading), standing(job, job.requests[0], reading)
    assert (got.way, got.outcome) == (want.way, want.outcome)
    assert (got.verdict and got.verdict.findings) == (want.verdict and want.verdict.findings)


@pytest.mark.parametrize("name", NAMES)
def test_one_way_is_judged_as_the_comparison_judges_it(name: str) -> None:
    job = sample(name)
    request = job.requests[0]
    reading = explain(job, request.circuit)
    for way in every_way():
        want, got = judge(job, request, way, reading), by_way(job, request, way, reading)
        assert (got.outcome, got.applies, got.refused, got.stopped_by) == (
            want.outcome, want.applies, want.refused, want.stopped_by
        )  # fmt: skip


def test_a_review_ends_each_job_as_the_verdict_command_does() -> None:
    rows = rows_of(SAMPLES)
    assert sorted(rows) == [f"{name}.json" for name in NAMES]
    for name in NAMES:
        verdict, told = contract(sample(name)), rows[f"{name}.json"]
        assert told["exit"] == verdict["exit"]
        for circuit in verdict["circuits"]:
            for proposal in circuit["proposals"]:
                mine = next(item for item in told["proposals"] if item["request"] == proposal["request"])
                assert {key: mine[key] for key in ("way", "verdict", "missing", "conditions")} == {
                    key: proposal[key] for key in ("way", "verdict", "missing", "conditions")
                }


def test_rules_broken_are_named_with_their_regulation(tmp_path: Path) -> None:
    def onto_a_spur(body: Facts) -> None:
        body["requests"][0].update(at="s1", chosen_way="spur_at_point", outlets=[outlet("w1", 3)])

    put(tmp_path, "a.json", onto_a_spur)
    proposal = rows_of(tmp_path)["a.json"]["proposals"][0]
    assert proposal["verdict"] == "stop"
    assert proposal["broken"]
    assert all(finding["regulation"] and finding["says"] for finding in proposal["broken"])


def test_a_circuit_with_nothing_proposed_is_judged_as_it_stands(tmp_path: Path) -> None:
    put(tmp_path, "a.json", lambda body: body.update(requests=[]))
    told = rows_of(tmp_path)["a.json"]
    assert told["exit"] == 4
    assert told["proposals"] == []
    assert (
        told["circuits"][0]["existing"]["verdict"]
        == contract(sample("larch_row"))["circuits"][0]["existing"]["verdict"]
    )


# against the verdict kept at the time -------------------------------------------------------------------------
def test_nothing_changed_where_nothing_changed(tmp_path: Path) -> None:
    put(tmp_path, "a.json", keep_verdict)
    kept = rows_of(tmp_path)["a.json"]["proposals"][0]["kept"]
    assert kept["changes"] == []
    assert kept["verdict_then"] == kept["verdict_now"]
    assert "kept:" not in reviewed(tmp_path)[1]


def test_a_reading_taken_out_since_is_a_change_for_the_worse(tmp_path: Path) -> None:
    put(tmp_path, "a.json", keep_verdict, lambda body: drop_readings(body, "polarity"))
    kept = rows_of(tmp_path)["a.json"]["proposals"][0]["kept"]
    told = next(item for item in kept["changes"] if item["rule"] == "polarity_right")
    assert (told["kind"], told["was"], told["now"], told["worse"]) == ("outcome", "holds", "cannot_tell", True)
    assert kept["verdict_now"] == "more"
    assert kept["changes"][0]["worse"]
    text = reviewed(tmp_path)[1]
    assert "polarity right at c3: holds then, cannot tell now" in text


def test_a_figure_that_moved_and_broke_nothing_is_in_the_json_alone(tmp_path: Path) -> None:
    put(tmp_path, "a.json", keep_verdict, lambda body: set_reading(body, "zs", 0.53, "p5"))
    told = rows_of(tmp_path)["a.json"]["proposals"][0]["kept"]["changes"]
    moved = next(item for item in told if item["kind"] == "figures")
    assert moved["was"] == moved["now"] == "holds"
    assert not moved["worse"]
    assert "changed:" not in reviewed(tmp_path)[1]


def test_a_rule_that_was_not_asked_then_and_one_that_is_no_more(tmp_path: Path) -> None:
    def of_older_rules(body: Facts) -> None:
        keep_verdict(body, rule_set="2025-01")
        kept = body["verdicts"][0]["findings"]
        row_then = next(item for item in kept if item["rule"] == "polarity_right")
        row_then["rule"] = "a_rule_of_then"

    put(tmp_path, "a.json", of_older_rules)
    kept = rows_of(tmp_path)["a.json"]["proposals"][0]["kept"]
    assert (kept["rule_set_then"], kept["rule_set_now"]) == ("2025-01", "2026-12")
    assert {(item["rule"], item["kind"]) for item in kept["changes"]} == {
        ("a_rule_of_then", "gone"),
        ("polarity_right", "new"),
    }
    assert kept["entries_since"] == 0
    assert "rules 2025-01 then, 2026-12 now; 0 entries since" in " ".join(reviewed(tmp_path)[1].split())


def test_the_kept_way_is_judged_and_not_the_one_chosen_since(tmp_path: Path) -> None:
    def other_way(body: Facts) -> None:
        keep_verdict(body)
        body["requests"][0]["chosen_way"] = "fused_spur"

    put(tmp_path, "a.json", other_way)
    proposal = rows_of(tmp_path)["a.json"]["proposals"][0]
    assert (proposal["way"], proposal["kept"]["way"]) == ("fused_spur", "spur_at_point")
    assert proposal["kept"]["changes"] == []


def test_the_newest_kept_verdict_counts(tmp_path: Path) -> None:
    def twice(body: Facts) -> None:
        keep_verdict(body)
        older = {**body["verdicts"][0], "id": "v901", "at": "2026-11-01T09:00:00Z", "outcome": "stop"}
        body["verdicts"].append(older)

    put(tmp_path, "a.json", twice)
    assert rows_of(tmp_path)["a.json"]["proposals"][0]["kept"]["verdict_then"] == "go"


# figures that look worked out -----------------------------------------------------------------------------------
def test_zs_that_is_ze_and_r1_r2_to_the_digit_at_every_point_is_asked_about() -> None:
    """The invented Mill Cottages figures were made by that very sum: 0.22 + 0.14, 0.23, 0.31, 0.43."""
    job = sample("mill_cottages")
    assert [(item.kind, item.places) for item in too_exact(job, job.circuits[0].id)] == [
        ("zs_from_r1_r2", ("p1", "p2", "p3", "p4"))
    ]


@pytest.mark.parametrize("edit", [
    lambda body: set_reading(body, "zs", 0.47, "p2"),  # one point of four is a digit off
    lambda body: drop_readings(body, "zs", "p2"),  # three points prove nothing
    lambda body: set_reading(body, "zs", 0.45, "p2", origin="calculated"),  # it says so itself, and three are left
], ids=["one off", "three points", "says so"])  # fmt: skip
def test_one_reading_off_or_too_few_points_are_not_asked_about(edit) -> None:
    job = sample("mill_cottages", edit)
    assert too_exact(job, job.circuits[0].id) == ()


def _at(body: Facts, test: str, values: dict[str, float], stage: str = "as_found") -> None:
    for number, (point, value) in enumerate(values.items()):
        body["readings"].append(
            {"id": f"{test[:2].replace('1', 'i')}{stage[:2]}{number}", "circuit": "c3", "point": point, "test": test,
             "value": value, "raw": f"{value:.2f}", "stage": stage, "at": "2026-12-01T09:30:00Z"}
        )  # fmt: skip


def test_r1_r2_copied_from_the_crossed_readings_is_asked_about() -> None:
    crossed = {"p1": 0.33, "p2": 0.34, "p3": 0.34, "p4": 0.34}
    copied = sample("larch_row", lambda body: _at(body, "r1_r2", crossed))
    assert [item.kind for item in too_exact(copied, "c3")] == ["r1_r2_from_crossed"]
    read = sample("larch_row", lambda body: _at(body, "r1_r2", {**crossed, "p1": 0.05}))
    assert too_exact(read, "c3") == ()


def test_zs_after_the_work_copied_from_zs_as_found_is_asked_about() -> None:
    as_found = {"p1": 0.30, "p2": 0.40, "p3": 0.47, "p4": 0.52}
    copied = sample("larch_row", lambda body: _at(body, "zs", as_found, "after_work"))
    assert [item.kind for item in too_exact(copied, "c3")] == ["zs_repeated"]
    again = sample("larch_row", lambda body: _at(body, "zs", {**as_found, "p3": 0.48}, "after_work"))
    assert too_exact(again, "c3") == ()


# the state, and what is left to do -----------------------------------------------------------------------------
def test_what_is_still_parted_and_the_state_of_the_log_are_told() -> None:
    told = rows_of(SAMPLES)["larch_row_annexe.json"]
    assert told["state"] == "off_not_proved"
    assert {item["what"] for item in told["circuits"][0]["outstanding"]} == {
        "line legs A and B", "neutral legs A and B", "earth legs A and B"
    }  # fmt: skip
    assert rows_of(SAMPLES)["larch_row.json"]["state"] == "not_known"


def test_begun_work_tells_what_keeps_it_from_being_finished(tmp_path: Path) -> None:
    put(tmp_path, "a.json", lambda body: row(body, "requests", "q1").update(work_begun_at="2026-12-01T09:00:00Z"))
    assert "the work is not logged as done" in rows_of(tmp_path)["a.json"]["proposals"][0]["to_finish"]


@pytest.mark.parametrize("zs, told", [(0.60, False), (1.90, True)])
def test_a_reading_after_the_work_outside_what_was_foretold_is_told(zs: float, told: bool, tmp_path: Path) -> None:
    def done(body: Facts) -> None:
        row(body, "requests", "q1").update(work_done_at="2026-12-01T09:00:00Z", chosen_way="spur_at_point")
        body["requests"][0]["outlets"] = [outlet("w1", 3)]
        _at(body, "zs", {"w1": zs}, "after_work")

    put(tmp_path, "a.json", done)
    left = rows_of(tmp_path)["a.json"]["proposals"][0]["to_finish"]
    assert any("outside what was foretold" in words for words in left) == told
    assert "not handed over" in left


def test_the_json_meets_its_schema_and_a_changed_one_does_not(tmp_path: Path) -> None:
    put(tmp_path, "kept.json", keep_verdict, lambda body: drop_readings(body, "polarity"))
    put(tmp_path, "none.json", lambda body: body.update(requests=[]))
    put(tmp_path, "mill.json", sample="mill_cottages")
    put(tmp_path, "annexe.json", sample="larch_row_annexe")
    (tmp_path / "broken.json").write_text("{")
    code, out, _ = reviewed(tmp_path, "--json")
    body = json.loads(out, parse_constant=lambda word: pytest.fail(f"{word} is not JSON"))
    schema = json.loads((files("fieldtool.record") / "review.schema.json").read_text())
    jsonschema.Draft202012Validator(schema).validate(body)
    assert (body["contract"], body["exit"], code, body["files"]) == ("fieldtool-review/1", 2, 2, 5)
    spoilers: list[Callable[[Facts], object]] = [
        lambda whole: whole["jobs"][2]["proposals"][0].update(verdict="perhaps"),
        lambda whole: whole["jobs"][1].pop("problem"),
        lambda whole: whole.pop("exit"),
    ]
    for spoil in spoilers:
        spoilt = copy.deepcopy(body)
        spoil(spoilt)
        assert not jsonschema.Draft202012Validator(schema).is_valid(spoilt)
