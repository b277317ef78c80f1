# tests/protocol/totals_test.py -- a totals row among the data is refused, left out or kept, as asked.
import unittest

from wire import WireTest, how_often


class Totals(WireTest):
    LABELLED = {"label": ["North", "South", "Total"], "count": [3, 5, 8], "exposure": [10, 20, 30]}

    def test_a_labelled_one_is_refused(self):
        for label in (
            "Total",
            "total",
            "TOTAL",
            "All",
            "Sum",
            "Grand total",
            "Totals:",
            "Total (all)",
            " total ",
            "Summe",
            "Overall",
        ):
            with self.subTest(label):
                of = self.LABELLED | {"label": ["North", "South", label]}
                self.refused(how_often(of), "totals_row", column="count", row=3, hint='"totals":"skip"')

    def test_it_is_found_wherever_it_stands(self):
        of = {"label": ["All", "North", "South"], "count": [8, 3, 5], "exposure": [30, 10, 20]}
        self.refused(how_often(of), "totals_row", row=1)

    def test_skip_and_keep(self):
        answer = self.answer(how_often(self.LABELLED, **{"with": {"totals": "skip"}}))
        self.assertEqual(answer["figures"]["count"], 8)
        self.assertEqual(self.note(answer, "totals_row")["where"], [{"column": "count", "row": 3}])
        answer = self.answer(how_often(self.LABELLED, **{"with": {"totals": "keep"}}))
        self.assertEqual(answer["figures"]["count"], 16)
        self.no_note(answer, "totals_row")

    def test_a_label_alone_or_a_sum_alone_is_no_totals_row(self):
        self.answer(how_often(self.LABELLED | {"count": [3, 5, 9]}))
        self.answer(how_often(self.LABELLED | {"label": ["North", "South", "West"]}))
        self.answer(how_often({"count": [1, 2, 3]}))
        self.answer(how_often({"count": [0, 1, 0, 1]}))
        self.answer(how_often(self.LABELLED | {"label": ["North", "South", "Totality"]}))

    def test_without_a_label_at_the_end(self):
        self.refused(how_often(self.LABELLED | {"label": ["North", "South", None]}), "totals_row", row=3)
        self.refused(how_often({"label": ["North", "South", ""], "count": [3, 5, 8]}), "totals_row", row=3)
        self.answer(how_often({"label": ["North", "", "South"], "count": [3, 8, 5]}))

    def test_without_any_label_the_exposures_must_add_up_as_well(self):
        self.refused(how_often({"count": [3, 5, 8], "exposure": [10, 20.5, 30.5]}), "totals_row", row=3)
        self.answer(how_often({"count": [3, 5, 8], "exposure": [10, 20, 20]}))

    def test_in_a_group(self):
        of = {"group": ["iron", "pvc", "total"], "count": [3, 5, 8], "exposure": [10, 20, 30]}
        self.refused({"ask": "which_higher", "of": of}, "totals_row", column="count", row=3)
        answer = self.answer({"ask": "which_higher", "of": of, "with": {"totals": "skip"}})
        self.assertEqual(answer["tables"]["groups"]["group"], ["iron", "pvc"])

    def test_a_total_that_counts_a_row_left_out(self):
        of = {"label": ["a", "b", "c", "total"], "count": [3, 4, 5, 12], "exposure": [10, None, 10, 30]}
        self.refused(how_often(of), "totals_row", row=4)

    def test_a_single_row_is_no_total(self):
        self.answer(how_often({"label": ["Total"], "count": [3]}))
        self.refused(how_often({"label": ["North", "Total"], "count": [3, 3]}), "totals_row", row=2)


if __name__ == "__main__":
    unittest.main()
