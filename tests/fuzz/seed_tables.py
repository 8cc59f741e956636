"""Sound tables: the samples, and some of what else records may hold, with tables beside them."""

from __future__ import annotations

import csv
import functools
import io
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import random

Grid = list[list[str]]
"""A table cell by cell, its header first."""

SAMPLES = Path(__file__).parent.parent.parent / "sample_pedigrees"
ROWS = 30

ODDITIES = """\
id,name,sire,dam,sex,born,died,left,litter,clone_of,group,count,genetic_dam,reared_by,mark,status,\
holder,line,may_breed,merit,rust_test,rust_test_on,rust_seen
A1,"Ada, the first",,,f,2010,,,,,,,,,111,living,North Quay,hill,yes,1.5,free,2015,unaffected
A2,Bo,wild,wild,m,2010-05,2019-01-01,,,,,,,,112,dead,North Quay,hill,no,,carrier,,affected
A3,"Ce
De",A2,A1,m,[2012..2013],,,L1,,,,,,113,,Gannet House,hill,,2,N/N,,
A4,,A2,A1,cow,~2012,,2020-02-30,L1,A3,,,,,113,gone,Gannet House,dale,,x,,,
A5,,A2|A3,A4,u,../2014,,,L2,,,,A1,A4,,,,dale,,,,,
A6,,A2:0.7|A3:0.3,A4,9,03/04/2014,,,L2,,,,A1,,,,,,,,,,
A7,,A3:0.5|A9:0.25,A10,♀,44000,,,,A6,shoal 1,12.15.3,,,,,,,,,,,
A8,,?,0,steer,1/2/14,,,,,shoal 1,30,,,,,,,,,,,
A9,,A5,A6,male,2016-01?,2017?,,L3,,,,,,,lost,,,,,,,
A10,,A5,A6,female,May 2016,,,L3,,,,,,,,,,,,,,
007,,A9,A10,,2018-W05,,,,,,,,,,,,,,,,,
7,,A9,A7,,201X,,,,,,,,,,,,,,,,,
1E+05,,007,7,,2019-05-31/2020,,,,,,,,,,,,,,,,,
"""
FACTS = """\
id,born,died,sex,holder,last_seen,Weight
A1,2009,,f,,2019,12
A3,2013,,,Hazelwick,2020-01-02,9
A3,2013,2021,m,,2020-03-02,10
K0001,~2020,2021-12-19,male,,,
T001,,2001,f,Dunmere,,
A99,2001,,,,,
"""
EVENTS = """\
id,date,event,from,to
A1,2010-05-01,birth,,North Quay
A1,2015,move,North Quay,Gannet House
A2,2019-02,death,,
A3,03/04/2018,transfer,Gannet House,North Quay
A3,2017,seen,,
T001,2000-07-16,died,,
K0001,2021,sold,cage 30,
A98,2020,hatched,,
A4,,arrival,,
"""
DECISIONS = """\
decision,id,sire,dam,row,also,parent,field,value,kind,who,when,why,litters,until
use-row,A3,,,4,,,,,,Ann,2024-05-01,seen the card,,
merge,A9,,,,A10|A11,,,,,Ann,,same chip,,
drop-link,A6,,,,,dam,,,,,,,,
set,A4,,,,,,sex,male,,,,typing error,,
accept,A5,,,,,,,,parent-without-row,,,,,
set,A8,,,,,,dam,A1,,,,,,
rest,A7,,,,,,,,,,,,,
together,,A2,A1,,,,,,,,,bonded,,2028
at-most,A2,,,,,,,,,,,,1,
"""


@functools.cache
def corpus() -> dict[str, Grid]:
    """Sound tables by name."""
    texts = {path.stem: path.read_text("utf-8") for path in sorted(SAMPLES.glob("*.csv"))}
    texts["oddities"] = ODDITIES
    return {name: list(csv.reader(io.StringIO(text, newline=""))) for name, text in texts.items()}


def cut_short(chance: random.Random) -> Grid:
    """The header and some rows of one of them."""
    header, *rows = corpus()[chance.choice(list(corpus()))]
    first = chance.choice((0, chance.randrange(len(rows))))
    return [list(row) for row in (header, *rows[first : first + chance.randint(1, ROWS)])]
