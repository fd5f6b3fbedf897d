"""What a sweep solves, on which meshes, and what it keeps of each row."""

from concurrent.futures import ThreadPoolExecutor

import pytest

import axicfd
from axicfd.mesh.build import family
from axicfd.variants import sweep
from axicfd.variants.plan import read_plan
from axicfd.variants.runner import REFUSED, SOLVED
from tests.variants.test_runner import BASE

FLOWS = {"key": "stream.water.reynolds", "values": [40.0, 60.0, 9000.0]}


class Kept:
    """A store in memory."""

    def __init__(self):
        self.found = {}
        self.results = {}

    def records(self, keys):
        return {key: self.found[key] for key in keys if key in self.found}

    def put(self, record, result):
        self.found[record.key] = record
        self.results[record.key] = result


def solved(store, tables, **options):
    plan = read_plan(tables)
    jobs, keys = sweep.jobs_of(plan, sweep.shared_meshes(plan.base))
    seen = []
    sweep.solve_rows(
        jobs, store, executor=lambda: ThreadPoolExecutor(1), on_progress=lambda event: seen.append(event), **options
    )
    return plan, keys, seen


def test_rows_are_solved_once_and_a_larger_plan_solves_what_is_new():
    store = Kept()
    plan, keys, seen = solved(store, {"case": BASE, "vary": [FLOWS]})
    records = [store.found[keys[row.number]] for row in plan.rows]
    assert [record.status for record in records] == [SOLVED, SOLVED, REFUSED]
    assert (seen[0].done, seen[-1].done, seen[-1].failed, seen[-1].left) == (0, 3, 1, 0.0)
    _, again, seen = solved(store, {"case": BASE, "vary": [FLOWS]})
    assert again == keys and len(seen) == 1 and (seen[0].done, seen[0].failed) == (3, 1)
    _, _, seen = solved(store, {"case": BASE, "vary": [FLOWS | {"values": [*FLOWS["values"], 50.0]}]})
    assert (seen[0].done, seen[-1].done) == (3, 4)
    _, _, seen = solved(store, {"case": BASE, "vary": [FLOWS]}, retry=True)
    assert (seen[0].done, seen[-1].done) == (2, 3)


def test_a_record_holds_the_headline_with_its_mesh_errors():
    store = Kept()
    plan, keys, _ = solved(store, {"case": BASE, "vary": [FLOWS]})
    alone = axicfd.solve(BASE.replace({"stream.water.reynolds": 60.0}), like=sweep.shared_meshes(BASE))
    record = store.found[keys[2]]
    name = "stream.water.outlet_temperature_K"
    assert record.values[name] == alone[name]
    assert record.half_widths[name] == alone.summary["numerical_uncertainty"]["stream"]["water"]["outlet_temperature_K"]
    assert record.cautions == tuple(dict.fromkeys(caution["code"] for caution in alone.summary["cautions"]))
    refused = store.found[keys[3]]
    assert refused.values == {} and "9000" in refused.message


def test_all_rows_take_over_the_meshes_of_the_base_case():
    longer = {"key": "section.all.length", "values": [0.1, 10.0]}
    plan = read_plan({"case": BASE, "vary": [longer]})
    jobs, _ = sweep.jobs_of(plan, sweep.shared_meshes(BASE))
    assert all(job.like.counts == {"radial": 16, "axial": 32} for job in jobs.values())


def test_a_row_that_changes_the_mesh_gets_its_own():
    store = Kept()
    plan, keys, _ = solved(store, {"case": BASE, "vary": [{"key": "mesh.axial", "values": [32, 64]}]})
    cells = [store.found[keys[row.number]].cells for row in plan.rows]
    assert cells[1] == 2 * cells[0]


def test_equal_rows_share_a_solve_and_the_title_does_not_count():
    rows = [{"title": "a"}, {"title": "b"}, {"stream.water.inlet_temperature": "300 K"}]
    plan = read_plan({"case": BASE, "rows": rows})
    jobs, keys = sweep.jobs_of(plan, sweep.shared_meshes(BASE))
    assert len(jobs) == 1 and len(set(keys.values())) == 1
    other = read_plan({"case": BASE, "rows": [{"stream.water.inlet_temperature": "301 K"}]})
    assert not jobs.keys() & sweep.jobs_of(other, sweep.shared_meshes(BASE))[0].keys()


def test_an_accuracy_of_the_base_case_chooses_the_meshes_of_all():
    base = BASE.replace({"mesh": None, "solve.accuracy": {"pressure_drop": 0.02}, "mesh.at_most": 3000})
    meshes = sweep.shared_meshes(base)
    assert meshes.cells == axicfd.solve(base).summary["cells"]


def test_meshes_survive_their_text():
    from axicfd.case.layout import layout

    meshes = family(BASE, layout(BASE))
    assert sweep.meshes_of(sweep.meshes_text(meshes), BASE) == meshes


@pytest.mark.parametrize("keep_fields", [False, True])
def test_whole_results_are_handed_over_where_asked(keep_fields):
    store = Kept()
    tables = {"case": BASE, "vary": [FLOWS]}
    plan, keys, _ = solved(store, tables, keep_fields=keep_fields)
    kept = [store.results[keys[row.number]] is not None for row in plan.rows]
    assert kept == ([True, True, False] if keep_fields else [False] * 3)
    _, _, seen = solved(store, tables, keep_fields=True)
    assert seen[0].done == (3 if keep_fields else 0)
