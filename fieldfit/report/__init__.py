"""What an engineer sees, files and shows: result files, figures, the report page."""

from fieldfit.report.folder import OutputError
from fieldfit.report.overview import overview
from fieldfit.report.say import answer, headline
from fieldfit.report.write import write_report

__all__ = ["OutputError", "answer", "headline", "overview", "write_report"]
