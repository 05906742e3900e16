"""A store: one folder with everything in it, as the web layer and the command see it."""

import secrets
from pathlib import Path
from types import TracebackType
from typing import Final

from fieldapp import __version__
from fieldapp.store.accounts import Accounts
from fieldapp.store.database import Database
from fieldapp.store.disk import disk_told
from fieldapp.store.jobs import JobCache
from fieldapp.store.links import Links
from fieldapp.store.migrations import migrate
from fieldapp.store.photos import PhotoStore
from fieldapp.store.records import RecordStore
from fieldapp.store.summaries import make_again

DATABASE: Final = "bayreckon.db"


class Store:
    """Opens a folder, making what is missing. Close it, or use it in a `with`.

    Raises:
        DiskError: where the folder cannot be written.
        NewerStoreError: where a later version wrote it.
    """

    def __init__(self, folder: Path) -> None:
        with disk_told():
            folder.mkdir(parents=True, exist_ok=True)
            self.folder = folder.resolve()
            self.database = Database(self.folder / DATABASE)
            try:
                migrate(self.database)
                self._prepare()
                self.photos = PhotoStore(self.folder)
            except BaseException:
                self.database.close()
                raise
        self.records = RecordStore(self.database)
        self.accounts = Accounts(self.database)
        self.jobs = JobCache(self.database, self.records)
        self.links = Links(self.database)

    @property
    def identity(self) -> str:
        """Chance, drawn when the store was made or restored.

        A phone that meets another identity than last time cannot rely on its cursor, nor on what was acknowledged since the
        backup: it sends all of its records again, of which nothing is taken twice, and pulls from 0.
        """
        return str(self.database.value("SELECT value FROM meta WHERE name = 'identity'"))

    def close(self) -> None:
        """Close every connection."""
        self.database.close()

    def __enter__(self) -> "Store":
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        self.close()

    def _prepare(self) -> None:
        """An identity for a new store; and lists made again where another version of the reckoning made them."""
        made_by = self.database.value("SELECT value FROM meta WHERE name = 'summaries_by'")
        if made_by == __version__:
            return
        with self.database.write() as connection:
            connection.execute(
                "INSERT INTO meta (name, value) VALUES ('identity', ?) ON CONFLICT DO NOTHING", (secrets.token_hex(8),)
            )
            make_again(connection)
            connection.execute(
                "INSERT INTO meta (name, value) VALUES ('summaries_by', ?)"
                " ON CONFLICT (name) DO UPDATE SET value = excluded.value",
                (__version__,),
            )
