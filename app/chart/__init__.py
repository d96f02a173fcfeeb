"""What leaves for the chart: the annotated picture, and the values as JSON and CSV. No Qt."""

from app.chart.annotated import annotate, write_annotated
from app.chart.errors import FileExistsRefused, TargetRefused
from app.chart.values_file import (
    values_as_csv,
    values_as_json,
    values_document,
    write_values_csv,
    write_values_json,
)

__all__ = [
    "FileExistsRefused",
    "TargetRefused",
    "annotate",
    "values_as_csv",
    "values_as_json",
    "values_document",
    "write_annotated",
    "write_values_csv",
    "write_values_json",
]
