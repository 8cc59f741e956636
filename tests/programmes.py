"""Small random programmes, and every plan each of them allows.

Nothing here calls `pairing.plan`: candidates, limits and the objective are written from
docs of the public surface, with a kinship table of their own, so that the two can be compared.
"""

from __future__ import annotations

import csv
import io
import math
from functools import cache, lru_cache
from itertools import combinations_with_replacement

import numpy as np
from hypothesis import HealthCheck, settings
from hypothesis import strategies as st

from pairing.kinship.engine import kinship
from pairing.pedigree.descent import build_pedigree
from pairing.plan.plan import propose_plan
from pairing.policy.reading import policy_from_tables
from pairing.population.diversity import living_population
from pairing.records.readers import read_records

COLUMNS = (
    "id",
    "name",
    "sire",
    "dam",
    "sex",
    "born",
    "died",
    "status",
    "holder",
    "line",
    "may_breed",
    "may_breed_note",
    "merit",
    "end_cause",
    "left",
)
POSITIONS = {"North Quay": (54.1, -3.2), "South Mole": (50.0, 1.5), "West Pier": (52.0, -9.0)}
CLASH_WORDS = {
    "offspring_inbreeding": "young may be inbred to",
    "closest": "parents with offspring and full sibs",
    "lines": "lines are kept apart",
    "never": "never together: ",
    "together": "kept together: ",
    "litters_per_male": "a male has ",
    "at_most": "litters decided on: ",
    "litters_per_female": "a female has ",
    "share_per_male": "one male has ",
    "must_breed": "must breed: ",
}
"""Name of each limit to how its sentence in a clash begins; "moves" ends in "transfers at most"."""


def careful(examples):
    """Hypothesis settings that repeat exactly and mind no slow machine."""
    return settings(
        max_examples=examples,
        deadline=None,
        derandomize=True,
        suppress_health_check=[
            HealthCheck.too_slow,
            HealthCheck.data_too_large,
            HealthCheck.filter_too_much,
        ],
    )


def animal(animal_id, sex="", sire="", dam="", **facts):
    """One row of records; facts not given stay blank."""
    known = {"id": animal_id, "sex": sex, "sire": sire, "dam": dam, **facts}
    return {**dict.fromkeys(COLUMNS, ""), **known}


def records_text(rows):
    """The rows as CSV."""
    text = io.StringIO()
    writer = csv.DictWriter(text, COLUMNS, lineterminator="\n")
    writer.writeheader()
    writer.writerows(rows)
    return text.getvalue()


def population_of(rows, tables=None):
    """The population of rows, through the real reader."""
    policy = policy_from_tables(tables or {})
    records = read_records("-", stdin=records_text(rows).encode())
    return living_population(
        kinship(build_pedigree(records)), as_of=policy.as_of, rule=policy.living
    )


def plan_of(rows, tables=None):
    """The plan for rows under the tables of a policy."""
    return propose_plan(population_of(rows, tables), policy_from_tables(tables or {}))


def chosen(plan):
    """(sire, dam, young, litters) of each pair of a plan, by id."""
    ids = plan.population.pedigree.ids
    return [(ids[each.sire], ids[each.dam], each.young, each.litters) for each in plan.pairs]


def young_rows(litters):
    """A row of its own for every young of (sire, dam, young) litters."""
    return [
        animal(f"young-{number}-{each}", "", sire, dam)
        for number, (sire, dam, young) in enumerate(litters)
        for each in range(young)
    ]


def plain_kinship(rows):
    """Place of each id and the table of kinships, by the tabular method, founders unrelated."""
    by_id = {row["id"]: row for row in rows}

    @cache
    def depth(each):
        above = [by_id[each][role] for role in ("sire", "dam") if by_id[each][role]]
        return 1 + max((depth(parent) for parent in above), default=-1)

    order = sorted(by_id, key=depth)
    place = {each: number for number, each in enumerate(order)}
    table = np.zeros((len(order), len(order)))
    for each in order:
        here = place[each]
        above = [place[by_id[each][role]] for role in ("sire", "dam") if by_id[each][role]]
        for parent in above:
            table[here, :here] += table[parent, :here] / 2
        table[:here, here] = table[here, :here]
        table[here, here] = 0.5 + (table[above[0], above[1]] / 2 if len(above) == 2 else 0.0)
    return place, table


def kilometres(first, second):
    """Great-circle distance by the law of cosines on a sphere of 6371 km."""
    (a, b), (c, d) = (map(math.radians, each) for each in (first, second))
    cosine = math.sin(a) * math.sin(c) + math.cos(a) * math.cos(c) * math.cos(b - d)
    return 6371.0 * math.acos(min(1.0, max(-1.0, cosine)))


@lru_cache(maxsize=64)
def litter_counts(pairs, litters):
    """Litters a pair in every multiset of `litters` litters, shape (multisets, pairs)."""
    chosen_pairs = np.array(list(combinations_with_replacement(range(pairs), litters)), dtype=int)
    counts = np.zeros((len(chosen_pairs), pairs), dtype=np.int16)
    if not len(chosen_pairs):
        return counts
    for each in range(litters):
        np.add.at(counts, (np.arange(len(chosen_pairs)), chosen_pairs[:, each]), 1)
    return counts


class EveryPlan:
    """All plans of a programme in the words of interface.md, with J and the limits each keeps.

    Animals are judged by status, sex, `may_breed` and decisions; ages are not looked at.
    """

    def __init__(self, rows, tables, young=None):
        self.rows = {row["id"]: row for row in rows}
        self.tables = tables
        self.limits = tables.get("limits", {})
        self.mating = tables.get("mating", {})
        self.decisions = tables.get("pairs", [])
        self.orders = tables.get("animals", [])
        self.stored = {each["id"]: each["doses"] for each in tables.get("gametes", [])}
        self.young = self.limits.get("young") if young is None else young
        self.size = self.limits.get("young_per_litter", 1)
        self.place, self.kinship = plain_kinship(rows)
        self.living = [row["id"] for row in rows if row["status"] in ("", "living")]
        kept = {
            each[role]
            for each in self.decisions
            for role in ("sire", "dam")
            if each["decision"] == "together-no-young"
        }
        resting = {each["id"] for each in self.orders if each["decision"] == "rest"}
        may = [
            each
            for each, row in self.rows.items()
            if row["may_breed"] != "no"
            and each not in kept | resting
            and (each in self.living or each in self.stored)
        ]
        self.males = [each for each in may if self.rows[each]["sex"] == "m"]
        self.females = [each for each in may if self.rows[each]["sex"] == "f"]
        self.pairs = [(sire, dam) for sire in self.males for dam in self.females]
        self.candidates = [*self.males, *self.females]
        self.incidence = np.array(
            [[each in pair for each in self.candidates] for pair in self.pairs], dtype=float
        ).reshape(len(self.pairs), len(self.candidates))

    def plans(self):
        """Litters and young of each pair in every plan, two arrays of shape (plans, pairs)."""
        full, rest = divmod(self.young, self.size)
        number = len(self.pairs)
        if not number:
            return np.zeros((0, 0), dtype=np.int16), np.zeros((0, 0), dtype=np.int16)
        litters = litter_counts(number, full) if full else np.zeros((1, number), dtype=np.int16)
        young = litters * self.size
        if rest:
            small = np.eye(number, dtype=np.int16)
            litters = (litters[:, None] + small).reshape(-1, number)
            young = (young[:, None] + rest * small).reshape(-1, number)
        return litters, young

    def as_arrays(self, plan):
        """A plan of (sire, dam, young, litters) as `plans` gives it, one row."""
        litters = np.zeros((1, len(self.pairs)), dtype=np.int16)
        young = litters.copy()
        for sire, dam, born, number in plan:
            litters[0, self.pairs.index((sire, dam))] += number
            young[0, self.pairs.index((sire, dam))] += born
        return litters, young

    def offspring_inbreeding(self):
        """The kinship of each pair."""
        return np.array([self.kinship[self.place[s], self.place[d]] for s, d in self.pairs])

    def travel(self):
        """Kilometres between each pair's holders, 0 where not known, and for stored semen."""
        where = {
            each["name"]: (each["latitude"], each["longitude"])
            for each in self.tables.get("holders", [])
        }
        km = []
        for pair in self.pairs:
            here, there = (self.rows[each]["holder"] for each in pair)
            known = here in where and there in where and pair[0] not in self.stored
            km.append(kilometres(where[here], where[there]) if known and here != there else 0.0)
        return np.array(km)

    def apart(self):
        """Whether each pair needs a transfer."""
        return np.array(
            [
                bool(self.rows[s]["holder"] and self.rows[d]["holder"])
                and self.rows[s]["holder"] != self.rows[d]["holder"]
                and s not in self.stored
                for s, d in self.pairs
            ],
            dtype=bool,
        )

    def merit(self):
        """Merit of each candidate in standard deviations from the candidates' mean."""
        recorded = {
            each: float(self.rows[each]["merit"])
            for each in self.candidates
            if self.rows[each]["merit"]
        }
        values = np.array(list(recorded.values()) or [0.0])
        if values.std() == 0:
            return np.zeros(len(self.candidates))
        return np.array(
            [
                (recorded[each] - values.mean()) / values.std() if each in recorded else 0.0
                for each in self.candidates
            ]
        )

    def objective(self, litters, young):
        """J of plans given as arrays, shape (plans,)."""
        weights = {
            "inbreeding": 1.0,
            "diversity": 1.0,
            "travel": 0.0,
            "merit": 0.0,
            **self.tables.get("weights", {}),
        }
        size, total = len(self.living), young.sum(axis=1)
        living = [self.place[each] for each in self.living]
        mine = [self.place[each] for each in self.candidates]
        before = self.kinship[np.ix_(living, living)].mean()
        own = self.kinship[np.ix_(mine, living)].mean(axis=1)
        among = self.kinship[np.ix_(mine, mine)]
        count = young @ self.incidence
        after = (
            size**2 * before
            + size * count @ own
            + ((count @ among) * count).sum(axis=1) / 4
            + count @ (2 - 2 * np.diagonal(among)) / 8
        ) / (size + total) ** 2
        return (
            weights["inbreeding"] * (young @ self.offspring_inbreeding()) / total
            + weights["diversity"] * (size + total) / total * (after - before)
            + weights["travel"] * (litters @ self.travel()) / litters.sum(axis=1) / 1000
            - weights["merit"] * (count @ self.merit()) / (2 * total)
        )

    def barred_pairs(self):
        """Limit to whether each pair is barred by it."""
        f = self.offspring_inbreeding()
        ceilings = [self.limits.get("offspring_inbreeding", 9.0)]
        if "above_breed_mean" in self.limits:
            own = [2 * self.kinship[self.place[each], self.place[each]] - 1 for each in self.living]
            ceilings.append(sum(own) / len(own) + self.limits["above_breed_mean"])
        decided = {
            word: [
                (each["sire"], each["dam"]) for each in self.decisions if each["decision"] == word
            ]
            for word in ("never", "together")
        }
        return {
            "offspring_inbreeding": f > min(ceilings) + 1e-12,
            "closest": np.array(
                [
                    not self.mating.get("allow_closest", False) and self._closest(*pair)
                    for pair in self.pairs
                ],
                dtype=bool,
            ),
            "lines": np.array([self._apart_by_line(*pair) for pair in self.pairs], dtype=bool),
            "never": np.array([pair in decided["never"] for pair in self.pairs], dtype=bool),
            "together": np.array(
                [
                    pair not in decided["together"]
                    and any(
                        pair[0] == bond[0] or pair[1] == bond[1] for bond in decided["together"]
                    )
                    for pair in self.pairs
                ],
                dtype=bool,
            ),
        }

    def _closest(self, sire, dam):
        parents = [(self.rows[each]["sire"], self.rows[each]["dam"]) for each in (sire, dam)]
        full_sibs = parents[0] == parents[1] and all(parents[0])
        return full_sibs or sire in parents[1] or dam in parents[0]

    def _apart_by_line(self, sire, dam):
        first, second = self.rows[sire]["line"], self.rows[dam]["line"]
        may = {
            frozenset({each["name"], other})
            for each in self.tables.get("lines", [])
            for other in each.get("may_cross", [])
        }
        return first != second and frozenset({first, second}) not in may

    def _decided_most(self, each):
        most = [
            order["litters"]
            for order in self.orders
            if order["id"] == each and order["decision"] == "at-most"
        ]
        doses = math.inf if each in self.living else self.stored.get(each, math.inf)
        return min([*most, doses])

    def keeps(self, litters, young):
        """Name of each limit to whether each plan keeps it, shape (plans,)."""
        males = len(self.males)
        used = litters @ self.incidence
        born = young @ self.incidence
        per_male = self.limits.get("litters_per_male")
        if per_male is None and self.mating.get("system", "pairs") == "pairs":
            per_male = 1
        per_male = math.inf if per_male is None else per_male
        per_female = self.limits.get("litters_per_female", 1)
        decided = np.array([self._decided_most(each) for each in self.candidates])
        kept = {
            name: litters @ barred.astype(int) == 0 for name, barred in self.barred_pairs().items()
        }
        kept["litters_per_male"] = (used[:, :males] <= per_male).all(axis=1)
        kept["litters_per_female"] = (used[:, males:] <= per_female).all(axis=1)
        kept["at_most"] = (used <= decided).all(axis=1)
        share = self.limits.get("share_per_male", 1.0)
        kept["share_per_male"] = (born[:, :males] <= share * young.sum(axis=1)[:, None] + 1e-9).all(
            axis=1
        )
        moved = ((litters > 0) & self.apart()).sum(axis=1)
        kept["moves"] = moved <= self.limits.get("moves", math.inf)
        kept["must_breed"] = np.ones(len(litters), dtype=bool)
        for order in self.orders:
            if order["decision"] == "must-breed":
                kept["must_breed"] &= (
                    used[:, self.candidates.index(order["id"])] > 0
                    if order["id"] in self.candidates
                    else False
                )
        for each in self.decisions:
            if each["decision"] == "must-breed":
                pair = (each["sire"], each["dam"])
                kept["must_breed"] &= (
                    litters[:, self.pairs.index(pair)] > 0 if pair in self.pairs else False
                )
        return kept

    def within_limits(self):
        """Litters and young of the plans that keep every limit."""
        litters, young = self.plans()
        good = np.logical_and.reduce(list(self.keeps(litters, young).values()))
        return litters[good], young[good]

    def best(self):
        """The least J within the limits, or None when no plan keeps them."""
        litters, young = self.within_limits()
        return float(self.objective(litters, young).min()) if len(litters) else None


def named_limits(clash):
    """Limits that the sentences of a clash name, without the wanted young at its head."""
    named = []
    for sentence in clash[1:]:
        found = [name for name, begin in CLASH_WORDS.items() if sentence.startswith(begin)]
        if sentence.endswith("transfers at most"):
            found.append("moves")
        named += found
    return named


@st.composite
def programmes(draw, most=5, merits=True, lines=False):
    """Rows of a programme with 3 to `most` living males and as many females, and dead forebears."""
    sexes = [
        *["m"] * draw(st.integers(3, most)),
        *["f"] * draw(st.integers(3, most)),
    ]
    dead = draw(st.lists(st.sampled_from("mf"), min_size=1, max_size=5))
    entries = draw(st.permutations([(sex, "") for sex in sexes] + [(sex, "dead") for sex in dead]))
    numbers = draw(st.permutations(range(1, len(entries) + 1)))
    earlier = {"m": [], "f": []}
    rows = []
    for number, (sex, status) in zip(numbers, entries, strict=True):
        parents = {"m": "", "f": ""}
        if len(rows) >= 3:
            for role, ids in earlier.items():
                if ids and draw(st.integers(0, 9)):
                    parents[role] = draw(st.sampled_from(ids))
        rows.append(
            animal(
                f"A{number}",
                sex,
                parents["m"],
                parents["f"],
                status=status,
                holder=draw(st.sampled_from(["", *POSITIONS])),
                line=draw(st.sampled_from(["hill", "hill", "dale", ""])) if lines else "",
                merit=draw(st.sampled_from(["", "-1.5", "0.25", "2"])) if merits else "",
            )
        )
        earlier[sex].append(f"A{number}")
    if draw(st.booleans()):
        draw(st.sampled_from(rows))["may_breed"] = "no"
    return draw(st.permutations(rows))


def _sometimes(draw, table, key, values, chances=2):
    """Give a table a key once in `chances`."""
    if draw(st.integers(1, chances)) == 1:
        table[key] = draw(st.sampled_from(values))


@st.composite
def season_limits(draw, pairs, most_young=6, most_plans=60_000):
    """The wanted young and limits on them, with at most so many plans in all."""
    size = draw(st.integers(1, 3))

    def plans(young):
        full, rest = divmod(young, size)
        return math.comb(pairs + full - 1, full) * (pairs if rest else 1)

    young = [each for each in range(1, most_young + 1) if plans(each) <= most_plans]
    limits = {"young": draw(st.sampled_from(young)), "young_per_litter": size}
    _sometimes(draw, limits, "litters_per_male", [1, 2, 2, 3, 3])
    _sometimes(draw, limits, "litters_per_female", [1, 2, 2, 3])
    _sometimes(draw, limits, "share_per_male", [0.25, 0.34, 0.5, 0.6, 0.75, 1.0], 3)
    _sometimes(draw, limits, "moves", [0, 1, 1, 2, 3], 3)
    _sometimes(draw, limits, "offspring_inbreeding", [0.0, 0.0625, 0.125, 0.1875, 0.25], 3)
    _sometimes(draw, limits, "above_breed_mean", [0.0, 0.05, 0.125], 6)
    return limits


@st.composite
def decisions(draw, rows, most=2):
    """Standing decisions on pairs and on animals, no pair and no animal twice."""
    living = {
        sex: [row["id"] for row in rows if row["sex"] == sex and not row["status"]] for sex in "mf"
    }
    pair = st.tuples(st.sampled_from(living["m"]), st.sampled_from(living["f"]))
    tables = {}
    words = ["never", "never", "together", "must-breed", "together-no-young"]
    tables["pairs"] = [
        {"sire": sire, "dam": dam, "decision": draw(st.sampled_from(words))}
        for sire, dam in draw(st.lists(pair, unique=True, max_size=most))
    ]
    tables["animals"] = []
    for each in draw(
        st.lists(st.sampled_from(living["m"] + living["f"]), unique=True, max_size=most)
    ):
        word = draw(st.sampled_from(["rest", "must-breed", "at-most"]))
        entry = {"id": each, "decision": word}
        if word == "at-most":
            entry["litters"] = draw(st.integers(0, 2))
        tables["animals"].append(entry)
    return {name: entries for name, entries in tables.items() if entries}


@st.composite
def policies(draw, rows, **limits):
    """Tables of a policy for the programme `rows`."""
    males, females = (sum(row["sex"] == sex and not row["status"] for row in rows) for sex in "mf")
    tables = {"limits": draw(season_limits(males * females, **limits)), "mating": {}, "weights": {}}
    _sometimes(draw, tables["mating"], "system", ["one-male-several-females"])
    _sometimes(draw, tables["mating"], "allow_closest", [True])
    _sometimes(draw, tables["weights"], "inbreeding", [0.0, 0.0, 0.5, 3.0])
    _sometimes(draw, tables["weights"], "diversity", [0.0, 0.5, 2.0], 4)
    _sometimes(draw, tables["weights"], "travel", [0.05, 1.0], 3)
    _sometimes(draw, tables["weights"], "merit", [0.02, 0.3], 3)
    tables.update(draw(decisions(rows)))
    if draw(st.booleans()):
        tables["holders"] = [
            {"name": name, "latitude": latitude, "longitude": longitude}
            for name, (latitude, longitude) in POSITIONS.items()
            if draw(st.integers(0, 4))
        ]
    if any(row["line"] for row in rows):
        tables["lines"] = [
            {"name": "hill", "may_cross": draw(st.sampled_from([[], ["dale"]]))},
            {"name": "dale"},
        ]
    return tables
