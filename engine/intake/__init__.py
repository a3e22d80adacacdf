"""From spreadsheets to a week and its findings, and the way back to text for a grid or a blank workbook."""
