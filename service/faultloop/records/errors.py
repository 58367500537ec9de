"""What can go wrong with the records, in an operator's words.

RecordsError
├── DatabaseRefused      the database URL cannot be used as it stands
├── DatabaseUnreachable  the database does not answer, or not in time
├── WriterBusy           too much is waiting to be stored already
├── WriterClosed         the writer does not run (not yet, or no longer)
└── StorageFailed        the database did not confirm the record
    ├── StorageUnavailable  not even a transaction could be begun
    └── RecordRefused       it never will: the record itself cannot be stored
"""


class RecordsError(Exception):
    """Something about the records went wrong; the message says what, and what to do."""


class DatabaseRefused(RecordsError):
    """The database URL cannot be used as it stands."""


class DatabaseUnreachable(RecordsError):
    """The database does not answer, or not in time."""


class WriterBusy(RecordsError):
    """So many records wait to be stored that another one would only wait longer."""


class WriterClosed(RecordsError):
    """The writer does not run: it was not started yet, or it has been closed."""


class StorageFailed(RecordsError):
    """The database did not confirm the record, so it must be taken as not stored."""


class StorageUnavailable(StorageFailed):
    """The database could not be reached, or would not let anybody write, within its time limit."""


class RecordRefused(StorageFailed):
    """The database will never take this record; trying again does not help."""
