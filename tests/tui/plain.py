"""What the tests of the plain visit share."""

from casebook.book import open_casebook


def newest(casebook):
    with open_casebook(casebook) as book:
        return book.case(book.cases(limit=1)[0].id)


ISOLATION = ("Ines", "Q4 in the control centre", "yes", "yes", "yes", "yes")
OPEN_CASE = ("Ines", "WP-104 wash water", "yes", "routine_check")
