// What a command prints: tables, CSV and JSON on standard output, progress on standard error.
export { csvText } from "./csv_text.ts";
export { type Format, formatRows, FORMATS, rowObjects } from "./output.ts";
export { type Progress, progressBar } from "./progress.ts";
export { outputWidth, useColour } from "./terminal.ts";
export { type TableColumn, type TableStyle, textTable, wrap } from "./text_table.ts";
export { type Cell, cellText, jsonText, numberText, visibleText } from "./values.ts";
