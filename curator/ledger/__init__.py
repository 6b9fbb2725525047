"""The ledger: a folder that holds all that is known about one photo root. The only room that speaks SQL.

`record.sqlite` holds what people said and what the roll is (precious); `derived/` what machines worked out
(may be deleted at any time: the next intake makes it again).
"""

from curator.ledger.derived import NOT_READ_YET
from curator.ledger.ledger import Ledger
from curator.ledger.record import EditionRow

__all__ = ["NOT_READ_YET", "EditionRow", "Ledger"]
