"""The CSV of transmitters taken into the store."""

import json

import pytest

from app.errors import TransmitterFileError
from app.transmitters.rows import Source
from app.transmitters.store import Store
from app.transmitters.template import COLUMNS, import_template, template_example
from tests.app.template_text import text_of


@pytest.fixture
def store(tmp_path):
    return Store.open(tmp_path / "data")


def write(tmp_path, text, name="mine.csv"):
    path = tmp_path / name
    path.write_text(text)
    return path


def test_an_import_stores_the_good_rows_and_counts_the_others(tmp_path, store):
    summary = import_template(write(tmp_path, text_of({}, {"channel": "48"}, {"channel": "1"})), store)
    assert (summary.written, len(summary.added), summary.result.rows_refused) == (True, 2, 1)
    assert [e.channel for e in store.emissions()] == ["47", "48"]
    (source,) = store.sources()
    assert (source.id, source.name, source.rows_kept, source.rows_refused) == ("mine", "mine.csv", 2, 1)


def test_an_import_is_told_in_lines_and_as_json(tmp_path, store):
    text = text_of({}, {"channel": "1"}, {"channel": "48", "erp_kw": "x"}, columns=(*COLUMNS, "remark"))
    summary = import_template(write(tmp_path, text), store, dry_run=True)
    lines = summary.text().splitlines()
    assert lines[0] == "1 of 3 rows kept, 2 refused (transmitters: 1, multiplexes: 1)"
    assert lines[1] == 'source "mine": 1 added, 0 changed, 0 gone (dry run: nothing was stored)'
    assert lines[2] == "columns not used: remark"
    assert lines[4] == 'line 4: erp_kw is "x": write a number such as 100, or <=100 where only the limit is known'
    document = json.loads(json.dumps(summary.document()))
    assert (document["rows_kept"], document["refused"][1]["column"], document["written"]) == (
        1,
        "erp_kw",
        False,
    )


def test_a_dry_run_tells_the_changes_and_stores_nothing(tmp_path, store):
    import_template(write(tmp_path, text_of({}, {"channel": "48"})), store)
    before = store.emissions()
    path = write(tmp_path, text_of({"erp_kw": "50"}, {"channel": "49"}))
    trial = import_template(path, store, dry_run=True)
    assert not trial.written
    assert store.emissions() == before
    real = import_template(path, store)
    assert (trial.added, trial.changed, trial.gone) == (real.added, real.changed, real.gone)
    assert [len(ids) for ids in (real.added, real.changed, real.gone)] == [1, 1, 1]


def test_importing_the_same_file_again_changes_nothing(tmp_path, store):
    path = write(tmp_path, template_example())
    first = import_template(path, store)
    again = import_template(path, store)
    assert len(first.added) == 3
    assert (again.added, again.changed, again.gone) == ((), (), ())


def test_a_file_without_a_good_row_leaves_what_is_stored(tmp_path, store):
    import_template(write(tmp_path, text_of({})), store)
    with pytest.raises(TransmitterFileError, match=r"no usable row \(1 read\): [^\n]+\nline 2: erp_kw is empty"):
        import_template(write(tmp_path, text_of({"erp_kw": ""})), store)
    with pytest.raises(TransmitterFileError, match="add rows under the header"):
        import_template(write(tmp_path, text_of()), store)
    assert len(store.emissions()) == 1


def test_a_spoiled_file_does_not_replace_good_rows(tmp_path, store):
    import_template(write(tmp_path, text_of({}, {"channel": "48"}, {"channel": "49"})), store)
    spoiled = write(tmp_path, text_of({}, {"channel": "48", "erp_kw": "x"}, {"channel": "49", "erp_kw": "x"}))
    with pytest.raises(TransmitterFileError, match="2 of 3 rows are refused, too many to replace"):
        import_template(spoiled, store)
    assert len(store.emissions()) == 3


def test_two_files_stand_side_by_side(tmp_path, store):
    store.replace_source(Source("demo", "demo"), [], [], [])
    import_template(write(tmp_path, text_of({}), "north.csv"), store)
    import_template(write(tmp_path, text_of({}), "south.csv"), store)
    assert [e.id for e in store.emissions()] == ["north:mast-one:first:682", "south:mast-one:first:682"]
