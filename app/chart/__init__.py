"""What leaves for the chart: the annotated picture, and the values as JSON and CSV. No Qt."""

from app.chart.annotated import annotate, write_annotated
from app.chart.errors import FileExistsRefused, PictureDiffers, TargetRefused
from app.chart.grid_report import grid_document
from app.chart.values_file import (
    values_as_csv,
    values_as_json,
    values_document,
    write_values_csv,
    write_values_json,
)
from app.chart.values_text import values_as_text
from app.chart.wording import grid_sentences

__all__ = [
    "FileExistsRefused",
    "PictureDiffers",
    "TargetRefused",
    "annotate",
    "grid_document",
    "grid_sentences",
    "values_as_csv",
    "values_as_json",
    "values_as_text",
    "values_document",
    "write_annotated",
    "write_values_csv",
    "write_values_json",
]
