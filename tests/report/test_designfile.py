"""design.json: the contract to the letter, read back, and what is said of files that break it."""

from __future__ import annotations

import json
from collections.abc import Callable
from copy import deepcopy
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from strategies import networks

from contactlogic.check import verify
from contactlogic.design import Bound, Design, Result
from contactlogic.errors import DesignFileError
from contactlogic.job.model import Job, Load
from contactlogic.network import Network, Pole
from contactlogic.report.designfile import DesignFile, design_json, dumps, read_design
from contactlogic.truth import Target, all_rows

RELAYS = ("UP", "DOWN", "FLOOD")
NETWORK = Network(
    RELAYS,
    "L",
    {"LAMP": "n1", "HORN": None},
    (Pole("UP", 1, "L", "n2", "n3"), Pole("DOWN", 1, "n1", "n3", "n2")),
)
JOB = Job(
    "Sluice house »2«",
    RELAYS,
    (Load("LAMP", Target(3, 0b01100110)), Load("HORN", Target(3, 0))),
    all_rows(3),
)
RESULT = Result(JOB, (Design("ladder", NETWORK, Bound(2, True), 8),), RELAYS)


def test_the_text_is_golden():
    assert dumps(RESULT) == (
        r"""{
 "schema": "contactlogic/design/1",
 "title": "Sluice house \u00bb2\u00ab",
 "relays": [
  "UP",
  "DOWN",
  "FLOOD"
 ],
 "repeaters": {},
 "designs": [
  {
   "form": "ladder",
   "fingerprint": "FINGER",
   "supply": "L",
   "loads": {
    "LAMP": "n1",
    "HORN": null
   },
   "contacts": [
    {
     "relay": "UP",
     "pole": 1,
     "common": "L",
     "make": "n2",
     "break": "n3"
    },
    {
     "relay": "DOWN",
     "pole": 1,
     "common": "n1",
     "make": "n3",
     "break": "n2"
    }
   ],
   "changeovers": 2,
   "per_relay": {
    "UP": {
     "poles": 1,
     "makes": 0,
     "breaks": 0,
     "changeovers": 1
    },
    "DOWN": {
     "poles": 1,
     "makes": 0,
     "breaks": 0,
     "changeovers": 1
    },
    "FLOOD": {
     "poles": 0,
     "makes": 0,
     "breaks": 0,
     "changeovers": 0
    }
   },
   "bound": {
    "at_least": 2,
    "proven_minimum": true
   },
   "verified_rows": 8
  }
 ]
}
""".replace("FINGER", RESULT.designs[0].fingerprint)
    )


@given(networks(), st.text(), st.booleans())
def test_what_is_written_is_read_back(network, title, proven):
    poles = len(network.poles)
    design = Design("bridge", network, Bound(poles, proven), 2 ** len(network.relays))
    result = Result(replace(JOB, title=title), (design, design), network.relays)
    assert read_design(dumps(result)) == DesignFile(title, network.relays, {}, (design, design))


@given(networks(), st.data())
def test_order_gaps_and_foreign_keys_are_taken_as_they_are(network, data):
    result = Result(JOB, (Design("bridge", network, Bound(0, False), 1),), network.relays)
    file: dict[str, Any] = json.loads(dumps(result))
    file["designs"][0]["drawn_by"] = "someone"
    contacts = data.draw(st.permutations(file["designs"][0]["contacts"]))
    for contact in contacts:
        contact["pole"] = contact["pole"] * 3 + 1
    file["designs"][0]["contacts"] = contacts
    read = read_design(json.dumps(file)).designs[0]
    read.network.assert_consistent()
    expected = tuple(replace(pole, number=pole.number * 3 + 1) for pole in network.poles)
    assert read.network == replace(network, poles=expected)
    assert bool(read.notes) == bool(network.poles)  # other pole numbers, another fingerprint


def test_a_file_is_read_from_disk_and_proved(tmp_path):
    path = tmp_path / "design.json"
    path.write_text("\ufeff" + dumps(RESULT), encoding="utf-8")
    for source in (path, str(path)):
        file = read_design(source)
        assert file.relays == RELAYS
        assert verify(file.designs[0], JOB, repeaters=file.repeaters).ok


def test_repeaters_are_read():
    repeated = replace(
        NETWORK,
        relays=(*RELAYS, "UP_R"),
        poles=(Pole("DOWN", 1, "n1", "n3", "n2"), Pole("UP_R", 1, "L", "n2", "n3")),
    )
    result = Result(
        JOB,
        (Design("ladder", repeated, Bound(2, True), 8),),
        repeated.relays,
        {"UP_R": "UP"},
    )
    file = read_design(dumps(result))
    assert file.repeaters == {"UP_R": "UP"}
    assert verify(file.designs[0], JOB, repeaters=file.repeaters).ok


def broken(change: Callable[[dict[str, Any], dict[str, Any]], object]) -> str:
    """The message for a good file with one change; `change` gets the file and its design."""
    file = deepcopy(design_json(RESULT))
    change(file, file["designs"][0])
    with pytest.raises(DesignFileError) as caught:
        read_design(json.dumps(file))
    return str(caught.value)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (
            lambda file, _: file.update(schema="contactlogic/design/2"),
            'schema: is "contactlogic/design/2"\n  expected: "contactlogic/design/1"',
        ),
        (
            lambda file, _: file.pop("schema"),
            'schema: is missing\n  expected: "contactlogic/design/1"',
        ),
        (lambda file, _: file.pop("title"), "title: is missing\n  expected: a text"),
        (
            lambda file, _: file.update(relays="UP"),
            'relays: is "UP"\n  expected: a list of relay names',
        ),
        (lambda file, _: file["relays"].append(7), "relays[3]: is 7\n  expected: a relay name"),
        (lambda file, _: file["relays"].append("UP"), "relays[3]: UP is named twice"),
        (
            lambda file, _: file.update(repeaters={"UP2": "UP"}),
            "repeaters.UP2: there is no relay UP2\n  expected: one of `relays`\n  did you mean UP?",
        ),
        (
            lambda file, _: file.update(repeaters={"UP": "DOWN", "FLOOD": "UP"}),
            "repeaters.FLOOD: follows UP, itself a repeater\n  expected: a relay",
        ),
        (lambda file, _: file.update(designs={}), "designs: is {}\n  expected: a list of designs"),
        (
            lambda _, design: design.update(form="chain"),
            'designs[0].form: is "chain"\n  expected: "ladder" or "bridge"',
        ),
        (
            lambda _, design: design["loads"].update(form=3),
            "designs[0].loads.form: is 3\n  expected: the name of a net, or null",
        ),
        (
            lambda _, design: design["loads"].update({"": "n1"}),
            'designs[0].loads.: is ""\n  expected: a name',
        ),
        (
            lambda _, design: design["contacts"][1].update(make=4),
            "designs[0].contacts[1].make: is 4\n  expected: the name of a net, or null",
        ),
        (
            lambda _, design: design["contacts"][1].pop("break"),
            "designs[0].contacts[1].break: is missing\n  expected: the name of a net, or null",
        ),
        (
            lambda _, design: design["contacts"][1].update(common=None),
            "designs[0].contacts[1].common: is null\n  expected: the name of a net",
        ),
        (
            lambda _, design: design["contacts"][0].update(pole=0),
            "designs[0].contacts[0].pole: is 0\n  expected: a whole number from 1",
        ),
        (
            lambda _, design: design["contacts"][0].update(pole=True),
            "designs[0].contacts[0].pole: is true\n  expected: a whole number from 1",
        ),
        (
            lambda _, design: design["contacts"][0].update(make=None, **{"break": None}),
            "designs[0].contacts[0]: has only its common wired\n  expected: a net at make or break",
        ),
        (
            lambda _, design: design["contacts"][0].update(relay="DOWN"),
            "designs[0].contacts[1]: DOWN pole 1 is already used by contacts[0]\n"
            "  expected: each pole of a relay once",
        ),
        (
            lambda _, design: design["contacts"][0].update(relay="FLOD"),
            "designs[0].contacts[0].relay: there is no relay FLOD\n"
            "  expected: one of `relays`\n  did you mean FLOOD?",
        ),
        (
            lambda _, design: design.update(changeovers=3),
            "designs[0].changeovers: is 3\n  expected: 2, as in contacts",
        ),
        (
            lambda _, design: design["per_relay"]["UP"].update(makes=1),
            "designs[0].per_relay.UP.makes: is 1\n  expected: 0, as in contacts",
        ),
        (
            lambda _, design: design["per_relay"].pop("UP"),
            "designs[0].per_relay.UP: is missing\n  expected: counts, since UP has contacts",
        ),
        (
            lambda _, design: design["per_relay"].update(TIDE=design["per_relay"]["UP"]),
            "designs[0].per_relay.TIDE: there is no relay TIDE\n  expected: one of `relays`",
        ),
        (
            lambda _, design: design["per_relay"].update(UP=1),
            "designs[0].per_relay.UP: is 1\n"
            "  expected: an object with poles, makes, breaks and changeovers",
        ),
        (
            lambda _, design: design["bound"].update(at_least=3),
            "designs[0].bound.at_least: is 3\n  expected: at most 2, since so many poles do",
        ),
        (
            lambda _, design: design["bound"].update(proven_minimum="yes"),
            'designs[0].bound.proven_minimum: is "yes"\n  expected: true or false',
        ),
        (
            lambda _, design: design.update(verified_rows=8.5, supply=""),
            'designs[0].supply: is ""\n  expected: the name of a net\n  (1 more like this)',
        ),
    ],
)
def test_what_breaks_the_contract_is_said_with_its_place(change, message):
    assert broken(change) == message


def test_a_relay_without_contacts_may_be_left_out_of_the_counts():
    file = deepcopy(design_json(RESULT))
    del file["designs"][0]["per_relay"]["FLOOD"]
    assert read_design(json.dumps(file)).designs == RESULT.designs


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (
            '{\n "schema": }',
            'line 2: not JSON: Expecting value\n     "schema": }\n               ^',
        ),
        ('{"title": 1, "title": 2}', "key title stands twice in one object"),
        ('{"a": ' + "[" * 60_000, "not JSON that can be read"),
        ('{"a": ' + "9" * 6_000 + "}", "not JSON that can be read"),
    ],
)
def test_text_that_is_not_json(text, message):
    with pytest.raises(DesignFileError) as caught:
        read_design(text)
    assert str(caught.value).startswith(message)


def test_files_that_cannot_be_read(tmp_path):
    for content, message in [
        (None, "No such file or directory"),
        (b"\xff\xfe{", "not a text file"),
        (b"[1, 2]", "not a design file"),
        (b"", "line 1: not JSON: Expecting value"),
    ]:
        path = tmp_path / "design.json"
        if content is not None:
            path.write_bytes(content)
        with pytest.raises(DesignFileError) as caught:
            read_design(path)
        assert message in str(caught.value)
        assert str(caught.value).startswith(str(path))
    with pytest.raises(DesignFileError):
        read_design(tmp_path)


@given(
    st.recursive(
        st.none() | st.booleans() | st.integers() | st.text(max_size=3),
        lambda inner: (
            st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=3), inner, max_size=3)
        ),
        max_leaves=6,
    ),
    st.data(),
)
def test_any_other_value_anywhere_is_refused_or_read_but_never_breaks(value, data):
    file: Any = deepcopy(design_json(RESULT))
    place = file
    while isinstance(place, dict | list) and place:
        keys = sorted(place) if isinstance(place, dict) else range(len(place))
        key = data.draw(st.sampled_from(list(keys)))
        if not isinstance(place[key], dict | list) or data.draw(st.booleans()):
            place[key] = value
            break
        place = place[key]
    try:
        read = read_design(json.dumps(file))
    except DesignFileError:
        return
    for design in read.designs:
        design.network.assert_consistent()
