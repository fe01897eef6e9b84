"""The pages in the order of the job, with their files and their long work.

A page added here is served, exported and offered in the brief; nothing else lists pages. One whose
module has ``NAME`` and ``answer(state, bridge)``, as in `app.pages.plain`, needs no more.
"""

from app import exports
from app.breadth import exports as breadth_exports
from app.desk import exports as data_exports
from app.lag.work import WORK
from app.outlook import exports as outlook_exports
from app.outlook.work import WORK as OUTLOOK_WORK
from app.pages import breadth, brief, data, lag, outlook, reading, scan
from app.reading import exports as reading_exports
from app.reading.bridge import WORK as READING_WORK
from app.scan import exports as scan_exports
from app.scan.bridge import WORK as SCAN_WORK

PAGES = (data, reading, breadth, lag, outlook, scan, brief)
WORKS = {
    "data": data.WORK,
    "lag": WORK,
    "outlook": OUTLOOK_WORK,
    "reading": READING_WORK,
    "scan": SCAN_WORK,
}  # page name -> kind -> (state, bridge) -> long work
EXPORTS = {
    "breadth": breadth_exports.csv_export,
    "lag": exports.csv_export,
    "data": data_exports.csv_export,
    "outlook": outlook_exports.csv_export,
    "reading": reading_exports.csv_export,
    "scan": scan_exports.csv_export,
}  # page name -> (view, query, bridge) -> file name, text
