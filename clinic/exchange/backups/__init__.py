"""An online copy of the database, checked and digested, and the check of such a copy.

Beside a copy stands a list of its tables with counts and SHA-256; a copy whose tables give the same
digests holds the same rows. The keys are not in it: they are kept apart, or whoever finds a copy
could forge the ledger.
"""

from clinic.exchange.backups.checking import check, restore_into
from clinic.exchange.backups.digests import BackupRefused, list_of
from clinic.exchange.backups.making import backup

__all__ = ["BackupRefused", "backup", "check", "list_of", "restore_into"]
