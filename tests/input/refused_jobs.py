"""Jobs that must be refused, by name: each is the text of a job file, and files beside it."""

from __future__ import annotations

WHOLE = '[table]\ncolumns = "UP DOWN | LAMP"\nrows = """\n0 0 | 0\n1 0 | 1\n0 1 | 1\n1 1 | 0\n"""\n'


def table(rows: str, columns: str = "UP DOWN | LAMP", more: str = "") -> str:
    """A job file with a table of its own."""
    return f'[table]\ncolumns = "{columns}"\nrows = """\n{rows}\n"""\n{more}'


def formulas(**loads: str) -> str:
    """A job file with formulas alone."""
    return "[formulas]\n" + "".join(f'{load} = "{text}"\n' for load, text in loads.items())


def in_file(loads: str = '["LAMP"]', file: str = "gate.csv", more: str = "") -> str:
    """A job file whose table stands in another file."""
    return f'title = "Gate"\n[table]\nfile = "{file}"\nloads = {loads}\n{more}'


TOML = {
    "an empty file": "",
    "comments alone": "# nothing yet\n",
    "neither table nor formulas": 'title = "Gate"\n',
    "formulas without a formula": "[formulas]\n",
    "not TOML: no equals sign": '[table]\ncolumns "UP | LAMP"\n',
    "not TOML: an open string": '[table]\ncolumns = "UP | LAMP\n',
    "not TOML: open rows": '[table]\ncolumns = "UP | LAMP"\nrows = """\n0 | 1\n',
    "not TOML: a bare word": "[formulas]\nLAMP = UP\n",
    "not TOML: a key twice": '[formulas]\nLAMP = "UP"\nLAMP = "DOWN"\n',
    "not TOML: a section twice": '[formulas]\nLAMP = "UP"\n[formulas]\nHORN = "DOWN"\n',
    "not TOML: JSON": '{"table": 3}\n',
    "not TOML: nested too deeply": "title = " + "[" * 100_000,
    "not TOML: a number of thousands of digits": "title = " + "9" * 5000,
    "unknown section": '[tabel]\ncolumns = "UP | LAMP"\n',
    "unknown section, like none": '[cabinet]\ncolour = "red"\n',
    "unknown key": '[table]\ncolums = "UP | LAMP"\nrows = "0 | 1"\n',
    "unknown key on top": 'titel = "Gate"\n' + WHOLE,
    "key in the wrong place": 'columns = "UP | LAMP"\n',
    "key of another section": formulas(LAMP="UP") + "[loads]\npoles = { UP = 2 }\n",
    "unknown key of a load": formulas(LAMP="UP") + "[loads]\nLAMP = { kid = 'lamp' }\n",
    "wrong type: title": "title = 3\n" + WHOLE,
    "wrong type: table": 'table = "UP DOWN"\n',
    "wrong type: rows": '[table]\ncolumns = "UP | LAMP"\nrows = [[0, 1], [1, 0]]\n',
    "wrong type: loads of a file": in_file('"LAMP"'),
    "wrong type: a load of a file": in_file("[1]"),
    "wrong type: formula": "[formulas]\nLAMP = 1\n",
    "wrong type: supply": formulas(LAMP="UP") + "[supply]\nfeed = 24\n",
    "wrong type: amps": formulas(LAMP="UP") + '[loads]\nLAMP = { amps = "0.2" }\n',
    "wrong type: poles": formulas(LAMP="UP") + "[limits]\npoles = { UP = 2.5 }\n",
    "wrong type: poles for all": formulas(LAMP="UP") + "[limits]\npoles = 2\n",
    "wrong value: amps": formulas(LAMP="UP") + "[loads]\nLAMP = { amps = 0 }\n",
    "wrong value: kind": formulas(LAMP="UP") + '[loads]\nLAMP = { kind = "lmap" }\n',
    "wrong value: kind in a section of its own": formulas(LAMP="UP")
    + '[loads.LAMP]\namps = 1\nkind = "bulb"\n',
    "wrong value: unlisted": table("0 0 | 1", more='unlisted = "of"\n'),
    "wrong value: poles": formulas(LAMP="UP") + "[limits]\npoles = { UP = -1 }\n",
    "wrong value: contacts": formulas(LAMP="UP") + '[limits]\ncontacts = { UP = "1C" }\n',
    "wrong value: isolate": formulas(LAMP="UP") + '[limits]\nisolate = "al"\n',
    "wrong value: objective": formulas(LAMP="UP") + '[limits]\nobjective = "cost"\n',
    "table without columns": '[table]\nrows = "0 | 1"\n',
    "table without rows": '[table]\ncolumns = "UP | LAMP"\n',
    "empty table section": "[table]\n",
    "table with rows and a file": WHOLE + 'file = "gate.csv"\n',
    "table with rows and loads": WHOLE + 'loads = ["LAMP"]\n',
    "file without loads": '[table]\nfile = "gate.csv"\n',
    "columns without a bar": table("0 0 0", "UP DOWN LAMP"),
    "columns with two bars": table("0 0 0", "UP | DOWN | LAMP"),
    "columns without a load": table("0 0", "UP DOWN |"),
    "columns without a relay": table("0 0", "| LAMP HORN"),
    "column named twice": table("0 0 | 0", "UP UP | LAMP"),
    "relay and load of one name": table("0 0 | 0", "UP DOWN | UP"),
    "columns that differ in case": table("0 0 | 0", "UP Up | LAMP"),
    "column that is a number": table("0 0 | 0", "UP 12 | LAMP"),
    "column that is a vote": table("0 0 | 0", "UP 2oo3 | LAMP"),
    "column with a hyphen": table("0 0 | 0", "UP K-1 | LAMP"),
    "column with an overlong name": table("0 0 | 0", "UP " + "K" * 200 + " | LAMP"),
    "no rows": table("\n# 0 0 | 1\n"),
    "ragged row: too few": table("0 0 | 0\n1 0 |\n0 1 | 1"),
    "ragged row: too many": table("0 0 | 0\n\n# the hoist\n1 0 1 | 0"),
    "ragged row: no bar": table("0 0 0\n1 0"),
    "ragged row: bar in the wrong place": table("0 | 0 0"),
    "ragged row: two bars": table("0 0 | 0 |"),
    "ragged row: cells run together": table("00 | 0"),
    "illegal cell": table("0 0 | 0\n1 2 | 1"),
    "illegal cell: an x for both": table("0 x | 0"),
    "illegal cell: a dash": table("0 – | 0"),
    "illegal cell: a word": table("0 0 | on"),
    "illegal cell: cells run together": table("0 0 | 01"),
    "contradicting rows": table("0 - | 0\n1 0 | 1\n0 1 | 1\n1 1 | 0"),
    "rows given twice that contradict": table("0 0 | 0\n0 0 | 1", more='unlisted = "off"'),
    "rows missing": table("0 0 | 0\n1 1 | 1"),
    "one row missing": table("0 0 | 0\n1 - | 1"),
    "too many inputs in a table": table("0", " ".join(f"K{i}" for i in range(17)) + " | LAMP"),
    "too many inputs in formulas": formulas(
        LAMP=" ".join(f"K{i}" for i in range(10)), HORN=" + ".join(f"K{i}" for i in range(5, 18))
    ),
    "too many inputs in a table and formulas": WHOLE
    + "[formulas]\nHORN = '"
    + " ".join(f"K{i}" for i in range(15))
    + "'\n",
    "formula: empty": formulas(LAMP=" "),
    "formula: bracket never closed": formulas(HORN="UP", LAMP="UP (DOWN + FLOOD"),
    "formula: bracket never opened": formulas(LAMP="UP DOWN) + FLOOD"),
    "formula: breaks off": formulas(LAMP="UP DOWN' +"),
    "formula: two signs": formulas(LAMP="UP + * DOWN"),
    "formula: another notation": formulas(LAMP="UP & !DOWN"),
    "formula: digits alone": formulas(LAMP="UP 12"),
    "formula: empty brackets": formulas(LAMP="UP ()"),
    "formula: vote of too few": formulas(LAMP="2oo3(UP, DOWN)"),
    "formula: vote of too many wanted": formulas(LAMP="4oo3(UP, DOWN, FLOOD)"),
    "formula: vote without parts": formulas(LAMP="2oo3 UP"),
    "formula: vote with zeros": formulas(LAMP="2003(UP, DOWN, FLOOD)"),
    "formula: over several lines": '[formulas]\nLAMP = """\nUP +\n& DOWN"""\n',
    "formula: nested too deeply": formulas(LAMP="A" + "'" * 300),
    "formula: too long": formulas(LAMP="A " * 60_000),
    "formulas: too long together": formulas(**{f"L{i}": "A " * 30_000 for i in range(4)}),
    "formula: load without a name": '[formulas]\n"" = "UP"\n',
    "formula: load with a bad name": '[formulas]\n"K 1" = "UP"\n',
    "formula: loads that differ in case": formulas(LAMP="UP", Lamp="DOWN"),
    "formula: relays that differ in case": formulas(LAMP="UP Down", HORN="DOWN"),
    "formula: load as its own contact": formulas(LAMP="UP + LAMP DOWN"),
    "formula: load as a contact of another": formulas(LAMP="UP", HORN="LAMP2 + LAMP DOWN"),
    "formula: load of the table as a contact": WHOLE + formulas(HORN="UP LAMP'"),
    "formula: relay of the table as a load": WHOLE + formulas(UP="DOWN"),
    "formula: load of the table again": WHOLE + formulas(LAMP="DOWN"),
    "formula: load like one of the table": WHOLE + formulas(Lamp="DOWN"),
    "formula: misspelt relay of the table": WHOLE + formulas(HORN="UP DWON'"),
    "formula: relay of the table in small letters": WHOLE + formulas(HORN="up"),
    "facts of an unknown load": formulas(LAMP="UP") + '[loads]\nLAMB = { kind = "lamp" }\n',
    "poles of an unknown relay": formulas(LAMP="UP DOWN") + "[limits]\npoles = { DWON = 2 }\n",
    "guided contacts of an unknown relay": formulas(LAMP="UP") + '[limits]\nguided = "UP DWON"\n',
    "poles of a load": formulas(LAMP="UP") + "[limits]\npoles = { LAMP = 2 }\n",
    "contacts of an unknown relay": formulas(LAMP="START") + '[limits.contacts]\nSTRAT = "1A1B"\n',
    "a table file that is not there": in_file(),
    "a table file of another kind": in_file(file="gate.ods"),
    "a table file without an ending": in_file(file="gate"),
    "a load of a table file named twice": in_file('["LAMP", "LAMP"]'),
}
"""Job files that stand alone."""

RING = "1 1 0 0 | 0\n0 1 1 0 | 1\n0 0 1 1 | 0\n1 0 0 1 | 1"


def sequence(rows: str = RING, columns: str = "A B C D | STRIKE", more: str = "") -> str:
    """A job file with a sequence of its own."""
    return f'[sequence]\ncolumns = "{columns}"\nrows = """\n{rows}\n"""\n{more}'


def pattern(rows: str = "1 0 0\n1 1 0\n0 0 1", more: str = 'step = "ring"\n') -> str:
    """A job file with a pattern of three lights."""
    return f'[pattern]\nloads = "RED AMBER GREEN"\nrows = """\n{rows}\n"""\n{more}'


def drives(more: str = "", **relays: str) -> str:
    """A job file with drives."""
    return "[drives]\n" + "".join(f'{relay} = "{text}"\n' for relay, text in relays.items()) + more


PRESS = "0 0 | 0\n1 0 | 0\n1 1 | 1\n0 1 | 1"  # P, then A follows; no way back

SEQUENCES = {
    "table beside a sequence": sequence() + WHOLE,
    "formulas beside drives": drives(A="B'") + formulas(LAMP="UP"),
    "drives beside a pattern": pattern() + drives(A="B'"),
    "timing beside a pattern": pattern() + '[timing]\nslow_release = "A"\n',
    "timing beside formulas": formulas(LAMP="UP") + '[timing]\nslow_release = "UP"\n',
    "timing alone": '[timing]\nslow_release = "A"\n',
    "no drive": "[drives]\n",
    "no rows": '[sequence]\ncolumns = "A B | STRIKE"\n',
    "unknown key": sequence(more="repaet = true\n"),
    "key of a table": sequence(more='unlisted = "off"\n'),
    "wrong type: repeat": sequence(more='repeat = "yes"\n'),
    "wrong type: inputs": sequence(more='inputs = ["P"]\n'),
    "wrong type: branches": sequence(more='branches = "P"\n'),
    "wrong type: a branch": sequence(more="branches = [7]\n"),
    "wrong type: goto": sequence(more='branches = [{ after = 1, when = "P", goto = "3" }]\n'),
    "wrong value: memory": sequence(more='memory = "alowed"\n'),
    "wrong value: step": pattern(more='step = "rings"\n'),
    "branch without goto": sequence(more='branches = [{ after = 1, when = "P" }]\n'),
    "branch with a key too many": sequence(
        more='branches = [{ after = 1, when = "P", goto = 2, if = "A" }]\n'
    ),
    "columns with two bars": sequence(columns="A B | C D | STRIKE"),
    "columns without a relay": sequence(columns="| STRIKE"),
    "column named twice": sequence(columns="A B C A | STRIKE"),
    "column and load that differ in case": sequence(columns="A B C D | d"),
    "column that is a number": sequence(columns="A B C 4 | STRIKE"),
    "too many columns": sequence(columns=" ".join(f"K{i}" for i in range(65)) + " | STRIKE"),
    "ragged row": sequence(RING.replace("0 1 1 0 | 1", "0 1 1 | 1")),
    "ragged row without loads": sequence("1 0\n0 1 1\n", columns="A B"),
    "illegal cell": sequence(RING.replace("0 1 1 0 | 1", "0 1 2 0 | 1")),
    "both values in a column": sequence(RING.replace("0 1 1 0 | 1", "0 - 1 0 | 1")),
    "illegal cell of a load": sequence(RING.replace("0 1 1 0 | 1", "0 1 1 0 | x")),
    "one row": sequence("1 1 0 0 | 0"),
    "unknown input": sequence(more='inputs = "P"\n'),
    "every column an input": sequence("0 | 0\n1 | 1", "P | LAMP", 'inputs = "P"\n'),
    "slow relay that is no column": sequence(more='[timing]\nslow_release = "A B CC"\n'),
    "slow input": sequence(PRESS, "P A | LAMP", 'inputs = "P"\n[timing]\nslow_operate = "P"\n'),
    "slow relay named twice": sequence(more='[timing]\nslow_operate = "A, A"\n'),
    "branch that waits for no input": sequence(
        PRESS, "P A | LAMP", 'inputs = "P"\nbranches = [{ after = 1, when = "A", goto = 3 }]\n'
    ),
    "branch to a row that is not there": sequence(
        PRESS, "P A | LAMP", 'inputs = "P"\nbranches = [{ after = 1, when = "P", goto = 9 }]\n'
    ),
    "branch of a move that leads elsewhere": sequence(
        PRESS, "P A | LAMP", 'inputs = "P"\nbranches = [{ after = 1, when = "P", goto = 3 }]\n'
    ),
    "branch from a row that does not wait": sequence(
        PRESS, "P A | LAMP", 'inputs = "P"\nbranches = [{ after = 2, when = "P\'", goto = 4 }]\n'
    ),
    "facts of an unknown coil": sequence(more='[loads]\nAA = { kind = "coil" }\n'),
    "poles of an unknown relay": sequence(more="[limits]\npoles = { E = 2 }\n"),
    "pattern without loads": '[pattern]\nloads = ""\nrows = "1"\nstep = "ring"\n',
    "pattern without a step": pattern(more=""),
    "pattern of one row": pattern("1 0 0"),
    "pattern: ragged row": pattern("1 0 0\n1 1"),
    "pattern: illegal cell": pattern("1 0 0\n1 2 0"),
    "pattern: load named twice": pattern().replace("GREEN", "RED"),
    "pattern: facts of an unknown load": pattern() + '[loads]\nGREN = { kind = "lamp" }\n',
    "drive: does not parse": drives(A="B' +"),
    "drive: bad name": '[drives]\n"K 1" = "A"\n',
    "drive: names that differ in case": drives(A="B b'"),
    "drive: relays that differ in case": drives(K="B'", k="B"),
    "drive: misspelt relay": drives(LATCH="LTACH + START", STEP="LATCH"),
    "drives: too many": drives(A=" + ".join(f"K{i}" for i in range(64))),
    "drives: slow relay that is none": drives('[timing]\nslow_release = "AA"\n', A="B'", B="A"),
    "drives: slow input": drives('[timing]\nslow_operate = "P"\n', A="P"),
    "drives: facts of what is none": drives('[loads]\nAA = { kind = "coil" }\n', A="B'"),
    "drive of an input": sequence(PRESS, "P A | LAMP", 'inputs = "P"\n') + drives(P="A", A="P"),
    "drive of no column": sequence(PRESS, "P A | LAMP", 'inputs = "P"\n') + drives(A="P", B="A"),
    "drive that names no column": sequence(PRESS, "P A | LAMP", 'inputs = "P"\n') + drives(A="P B"),
    "drive missing": sequence() + drives(A="D", B="A", C="B"),
}
"""Files of sequence, pattern and drives jobs."""

CSV = {
    "empty": "",
    "blank": "\n,,\n",
    "header alone": "UP,DOWN,LAMP\n",
    "no such load": "UP,DOWN,LAMB\n0,0,1\n",
    "no relay": "LAMP\n0\n",
    "column without a name": "UP,,LAMP\n0,0,1\n",
    "column named twice": "UP,UP,LAMP\n0,0,1\n",
    "ragged row": "UP,DOWN,LAMP\n0,0,1\n0,1\n",
    "ragged row: too many": "UP,DOWN,LAMP\n0,0,1\n0,1,1,1\n",
    "illegal cell": "UP,DOWN,LAMP\n# hoist\n0,2,1\n",
    "empty cell": "UP,DOWN,LAMP\n0,,1\n",
    "cell in words": "UP;DOWN;LAMP\n0;TRUE;1\n",
    "contradicting rows": "UP;DOWN;LAMP\n0;-;1\n1;-;0\n0;1;0\n",
    "rows missing": "UP,DOWN,LAMP\n0,0,1\n",
    "open quotes": 'UP,DOWN,LAMP\n0,"0,1\n',
    "too many inputs": ",".join(f"K{i}" for i in range(17)) + ",LAMP\n",
}
"""Bare tables wired with the load LAMP."""
