"""How a page of the guide looks: the house's sizes, rules below the rows of tables, tinted words of files."""

from __future__ import annotations

from PySide6.QtGui import (
    QBrush,
    QColor,
    QFont,
    QTextBlock,
    QTextBlockFormat,
    QTextCharFormat,
    QTextCursor,
    QTextDocument,
    QTextFormat,
    QTextFrameFormat,
    QTextLength,
    QTextTable,
)

from gainbench_app.theme import BODY_PX, LARGE_PX, Theme

HEADING_PX = {1: LARGE_PX + 3, 2: LARGE_PX - 2}
_ABOVE_PX = {1: 0, 2: 20}
_LINE_PERCENT = 132.0
_PARAGRAPH_PX, _ITEM_PX, _INDENT_PX = 9, 4, 18
_CELL_PX = 5.0


def dress(document: QTextDocument, theme: Theme, *, font: QFont) -> None:
    """Give a document that was read from markdown the look of the house.

    Parameters
    ----------
    document : QTextDocument
        As read; its text stays.
    theme : Theme
        Whose colours.
    font : QFont
        Of the body.
    """
    document.setIndentWidth(_INDENT_PX)
    tables = [one for one in document.rootFrame().childFrames() if isinstance(one, QTextTable)]
    block = document.begin()
    while block.isValid():
        _dress_block(block, theme, font=font, in_table=_table_of(block, tables))
        block = block.next()
    for table in tables:
        _dress_table(table, theme)


def _table_of(block: QTextBlock, tables: list[QTextTable]) -> QTextTable | None:
    at = block.position()
    return next((one for one in tables if one.firstPosition() <= at <= one.lastPosition()), None)


def _dress_block(block: QTextBlock, theme: Theme, *, font: QFont, in_table: QTextTable | None) -> None:
    cursor = QTextCursor(block)
    form = block.blockFormat()
    level = form.headingLevel()
    code = _is_code(block)
    shape = QTextBlockFormat()
    shape.setLineHeight(_LINE_PERCENT, QTextBlockFormat.LineHeightTypes.ProportionalHeight.value)
    shape.setTopMargin(_ABOVE_PX.get(level, 0))
    after = 0 if in_table is not None else _ITEM_PX if block.textList() is not None else _PARAGRAPH_PX
    shape.setBottomMargin(4 if level else after)
    if code:
        shape.setLeftMargin(_INDENT_PX)
        shape.setBottomMargin(_PARAGRAPH_PX if not _is_code(block.next()) else 0)
    cursor.mergeBlockFormat(shape)
    head = in_table is not None and in_table.cellAt(block.position()).row() == 0
    pieces = []
    iterator = block.begin()
    while not iterator.atEnd():
        pieces.append(iterator.fragment())
        iterator += 1
    for piece in pieces:
        cursor.setPosition(piece.position())
        cursor.setPosition(piece.position() + piece.length(), QTextCursor.MoveMode.KeepAnchor)
        cursor.setCharFormat(_hand(piece.charFormat(), theme, font=font, level=level, code=code, head=head))


def _is_code(block: QTextBlock) -> bool:
    form = block.blockFormat()
    return any(
        form.hasProperty(one) for one in (QTextFormat.Property.BlockCodeFence, QTextFormat.Property.BlockCodeLanguage)
    )


def _hand(form: QTextCharFormat, theme: Theme, *, font: QFont, level: int, code: bool, head: bool) -> QTextCharFormat:
    """The hand of a piece of text: what markdown says of it, in the house's type."""
    found = QTextCharFormat()
    found.setFontFamilies(font.families())
    found.setProperty(QTextFormat.Property.FontPixelSize, HEADING_PX.get(level, BODY_PX))
    strong = bool(level) or head or form.fontWeight() > QFont.Weight.Medium
    found.setFontWeight(QFont.Weight.DemiBold if strong else QFont.Weight.Normal)
    found.setForeground(QColor(theme.muted if head else theme.ink))
    if form.fontItalic():
        # Words of the window; the house has no slanted hand.
        found.setFontWeight(QFont.Weight.DemiBold)
    if form.fontFixedPitch() and not code:
        found.setBackground(QColor(theme.mixed(theme.outline, 0.14)))
    if form.isAnchor():
        found.setAnchor(True)
        found.setAnchorHref(form.anchorHref())
        found.setForeground(QColor(theme.speed))
        found.setFontUnderline(True)
    return found


def _dress_table(table: QTextTable, theme: Theme) -> None:
    form = table.format()
    form.setBorderCollapse(True)
    form.setBorder(0.0)
    form.setCellPadding(_CELL_PX)
    form.setCellSpacing(0.0)
    form.setTopMargin(2.0)
    form.setBottomMargin(12.0)
    form.setWidth(QTextLength(QTextLength.Type.PercentageLength, 100.0))
    form.setColumnWidthConstraints([])
    table.setFormat(form)
    for row in range(table.rows()):
        for column in range(table.columns()):
            cell = table.cellAt(row, column)
            look = cell.format().toTableCellFormat()
            look.setBottomBorder(1.0)
            look.setBottomBorderStyle(QTextFrameFormat.BorderStyle.BorderStyle_Solid)
            look.setBottomBorderBrush(QBrush(QColor(theme.rule)))
            look.setLeftPadding(0.0 if column == 0 else 2.0 * _CELL_PX)
            cell.setFormat(look)


def heading_blocks(document: QTextDocument) -> list[QTextBlock]:
    """The headings of a document, from top to bottom."""
    found = []
    block = document.begin()
    while block.isValid():
        if block.blockFormat().headingLevel():
            found.append(block)
        block = block.next()
    return found
