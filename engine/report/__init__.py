"""From a plan to what is handed over: the workbook, the loading lists, CSV and JSON."""
