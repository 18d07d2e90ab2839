"""What an engineer sees, files and shows: result files, figures, the report page."""

from fieldfit.report.actions import every_action
from fieldfit.report.expected import expected_table
from fieldfit.report.figures import FIGURES
from fieldfit.report.folder import OutputError
from fieldfit.report.notebook import findings_html
from fieldfit.report.outlook import outlook_sentences, outlook_table
from fieldfit.report.overview import overview
from fieldfit.report.plan_page import write_plan
from fieldfit.report.results import checks_table, members_table, readings_table, result_record
from fieldfit.report.say import answer, headline
from fieldfit.report.sketch import write_sketch
from fieldfit.report.terminal import say_findings
from fieldfit.report.write import write_report

__all__ = [
    "FIGURES",
    "OutputError",
    "answer",
    "checks_table",
    "every_action",
    "expected_table",
    "findings_html",
    "headline",
    "members_table",
    "outlook_sentences",
    "outlook_table",
    "overview",
    "readings_table",
    "result_record",
    "say_findings",
    "write_plan",
    "write_report",
    "write_sketch",
]
