"""The report as a whole: all faults at once, in order, each on one readable line."""

from __future__ import annotations


def test_desk_with_less_than_no_alerts_is_told_in_full(error_of, right):
    error = error_of(right + "alerts_per_day = -1\n")
    assert error.faults == ('vanner.toml: desk "metro", alerts_per_day = -1: must be above 0',)


def test_nine_different_faults_come_in_one_report(error_of):
    error = error_of(
        'watch = true\n[service]\npulse = "7s"\n'
        '[[source]]\nname = "harbour"\nkind = "foldr"\nevery = "soon"\n'
        '[[source]]\nname = "harbour"\nkind = "feed"\nurl = "wire.example"\n'
        '[[desk]]\nname = "metro"\nsources = ["harbor"]\ndigests = ["daily"]\n'
        'recipients = ["desk@town.example"]\n'
    )
    places = [line.removeprefix("vanner.toml: ").partition(":")[0] for line in error.faults]
    assert places == [
        "watch = true",
        'service, pulse = "7s"',
        'source 1, kind = "foldr"',
        'source 1, every = "soon"',
        'source 2, url = "wire.example"',
        'source 2, name = "harbour"',
        'desk "metro", digests 1 = "daily"',
        'desk "metro", sources 1 = "harbor"',
        'desk "metro", recipients = ["desk@town.example"]',
    ]
    assert "9 faults" in str(error)


def test_source_of_unknown_kind_is_checked_as_far_as_it_can_be(error_of, right):
    error = error_of(right.replace('"folder"', '"feeed"') + "\n")
    assert [line for line in error.faults if "path" in line] == []
    error = error_of(right.replace('kind = "folder"', 'kind = 3\nevry = "5s"\nlanguage = 5'))
    told = "\n".join(error.faults)
    assert 'evry = "5s": unknown key; did you mean every?' in told
    assert "language = 5: must be text in quotes" in told
    assert 'kind = 3: must be "feed" or "folder"' in told


def test_empty_file_lacks_source_and_desk(error_of):
    assert error_of("").faults == (
        "vanner.toml: source is missing: there must be at least one [[source]]",
        "vanner.toml: desk is missing: there must be at least one [[desk]]",
    )


def test_long_and_unprintable_values_stay_on_one_short_line(error_of, right):
    error = error_of(right + f'timezone = "a\\u001b[31m\\n\\u2028{"b" * 500}"\n')
    (line,) = error.faults
    assert line.isprintable()
    assert len(line) < 250
    assert '"a\\u001b[31m\\n\\u2028bbb' in line


def test_name_that_two_entries_share_names_neither(error_of, right):
    error = error_of(right + '[[desk]]\nname = "metro"\nsources = ["harbour"]\npuls = 1\n')
    assert any(line.startswith("vanner.toml: desk 2, puls = 1: ") for line in error.faults)
