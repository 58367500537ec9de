"""Callers' own sets of rules as the running service knows them: looked up once, remembered with what is stored."""

from collections import OrderedDict
from collections.abc import Iterator, Mapping

from fastapi.concurrency import run_in_threadpool
from sqlalchemy import Engine

from faultloop.api.problems import Refused
from faultloop.exchange.own_rules import STORED_NAME, is_own
from faultloop.records import rule_sets
from faultloop.rules.loader import LoadedRules, content, from_content
from faultloop.rules.strict import DataFileError

KEPT = 256


class StoredSets(Mapping[str, LoadedRules]):
    """Stored sets by name, each looked up when it is first named: for work in a thread of its own."""

    def __init__(self, engine: Engine) -> None:
        self._engine = engine
        self._held: dict[str, LoadedRules] = {}

    def __getitem__(self, name: str) -> LoadedRules:
        """The set of this name; one that was written for another version is as good as none."""
        if name not in self._held:
            told = rule_sets.content_named(self._engine, name) if STORED_NAME.fullmatch(name) else None
            if told is None:
                raise KeyError(name)
            try:
                self._held[name] = from_content(told)
            except DataFileError:
                raise KeyError(name) from None
        return self._held[name]

    def __iter__(self) -> Iterator[str]:
        """Names looked up so far."""
        return iter(self._held)

    def __len__(self) -> int:
        """How many were looked up so far."""
        return len(self._held)


class OwnRuleSets:
    """Stored sets by name and remembered digests, each bounded; both never change, so they are never stale."""

    def __init__(self, engine: Engine) -> None:
        self._engine = engine
        self.by_name: OrderedDict[str, LoadedRules] = OrderedDict()
        self._remembered: OrderedDict[str, None] = OrderedDict()

    async def find(self, name: str) -> LoadedRules | None:
        """The set stored under a name."""
        if not STORED_NAME.fullmatch(name):
            return None
        if name not in self.by_name:
            told = await run_in_threadpool(rule_sets.content_named, self._engine, name)
            if told is None:
                return None
            try:
                self.by_name[name] = from_content(told)
            except DataFileError:
                detail = "This stored rule set was written for another version of the service: store it anew."
                raise Refused("refused", detail) from None
        self.by_name.move_to_end(name)
        while len(self.by_name) > KEPT:
            self.by_name.popitem(last=False)
        return self.by_name[name]

    async def remember(self, loaded: LoadedRules) -> None:
        """Keep what a caller's set says before anything is stored that was judged by it."""
        if not is_own(loaded) or loaded.digest in self._remembered:
            return
        told = (loaded.digest, loaded.rules.key, content(loaded))
        await run_in_threadpool(rule_sets.remember, self._engine, *told)
        self._remembered[loaded.digest] = None
        while len(self._remembered) > KEPT:
            self._remembered.popitem(last=False)

    async def store(self, loaded: LoadedRules) -> tuple[str, bool]:
        """Store a set under its name; the digest that the name stands for, and whether it is new."""
        told = (loaded.digest, loaded.rules.key, content(loaded))
        return await run_in_threadpool(rule_sets.store, self._engine, *told)
