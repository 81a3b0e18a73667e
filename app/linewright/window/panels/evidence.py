"""The Evidence panel: what made the selected feature, and why."""

from __future__ import annotations

from PySide6.QtCore import QStringListModel, Qt
from PySide6.QtWidgets import (
    QCompleter,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QSizePolicy,
    QSplitter,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from ...job.view_breakdown import terms
from ...job.view_reasons import reasons
from . import evidence_text as say
from . import words
from .candidate_row import CandidateRow
from .facts_box import FactsBox
from .siblings import SiblingsBox
from .tall_area import TallArea

SHOWN = 6
LEAST = 0.005  # below this probability only the two best are listed
BUTTONS = ("claim.accept", "claim.blend", "claim.aside", "claim.note")


class EvidencePanel(QWidget):
    """Heading, candidates, species field, acts, Siblings."""

    def __init__(self, workbench, commands, parent=None):
        super().__init__(parent)
        self.setAccessibleName("Evidence")
        self._workbench = workbench
        self.heading, self.verdict, self.note = QLabel(), QLabel(), QLabel()
        self.flags = QLabel()
        self.rows = [CandidateRow(rank) for rank in range(SHOWN)]
        self.unlisted = CandidateRow(-1)
        self.none_near = QLabel(say.NO_CANDIDATES)
        self.species = QLineEdit()
        self.siblings, self.facts = SiblingsBox(workbench), FactsBox(workbench)
        self.buttons = {name: _act_button(commands[name], workbench) for name in BUTTONS}
        self._pages = QStackedWidget(self)
        self._pages.addWidget(_empty_page())
        self._pages.addWidget(self._page())
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.addWidget(self._pages)
        for row in self.rows:
            row.chosen.connect(self._choose)
        self.species.returnPressed.connect(self._name_species)
        self._completions = QStringListModel(self)
        completer = QCompleter(self._completions, self)
        completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        self.species.setCompleter(completer)

    def _page(self) -> QWidget:
        self.heading.setObjectName("heading")
        for label in (self.heading, self.verdict, self.note, self.flags, self.none_near):
            label.setWordWrap(True)
            label.setTextFormat(Qt.TextFormat.PlainText)
        for label in (self.verdict, self.note, self.flags, self.none_near):
            label.setObjectName("quiet")
        splitter = QSplitter(Qt.Orientation.Vertical)
        splitter.setChildrenCollapsible(False)
        splitter.addWidget(self._upper())
        splitter.addWidget(self.siblings)
        splitter.setSizes([600, 400])
        splitter.setStretchFactor(0, 3)
        splitter.setStretchFactor(1, 2)
        return splitter

    def _upper(self) -> QWidget:
        upper = QWidget()
        box = QVBoxLayout(upper)
        box.setContentsMargins(8, 6, 8, 4)
        box.setSpacing(4)
        box.addWidget(self.heading)
        for label in (self.verdict, self.flags, self.note):
            box.addWidget(label)
        box.addWidget(self._candidates(), 1)
        self.species.setPlaceholderText("another species, such as Fe I")
        self.species.setToolTip("Type a species and press Return to claim it (F2)")
        self.species.setAccessibleName("Claim a species by name")
        box.addWidget(self.species)
        buttons = QHBoxLayout()
        buttons.setSpacing(4)
        for button in self.buttons.values():
            buttons.addWidget(button, 1)
        box.addLayout(buttons)
        return upper

    def _candidates(self) -> QWidget:
        self.unlisted.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.unlisted.setCursor(Qt.CursorShape.ArrowCursor)
        self.unlisted.setToolTip("Probability that no catalogue line made this feature")
        self.area = TallArea((self.none_near, *self.rows, self.unlisted, self.facts))
        self.facts.told.connect(self.area.fit)
        return self.area

    def show_species(self, names: list[str]) -> None:
        self._completions.setStringList(names)

    def focus_species(self) -> None:
        self.species.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self.species.selectAll()

    def refresh(self) -> None:
        """Shows the selected feature of the present session."""
        row = self._workbench.selected_row()
        self._pages.setCurrentIndex(0 if row is None else 1)
        for command_id, button in self.buttons.items():
            button.setEnabled(self._workbench.allows(command_id))
        if row is None:
            self.siblings.clear()
            self.facts.clear()
            return
        session = self._workbench.session
        claim = session.claims[row]
        self.heading.setText(say.heading(session, row))
        self.heading.setToolTip(say.width_words(session, row))
        self.verdict.setText(say.verdict(claim))
        flags = say.flag_words(session, row)
        said = (say.remarkable(flags) if flags else "", say.peaks_line(session, row))
        self.flags.setText("\n".join(line for line in said if line))
        self.flags.setToolTip(words.flags(flags))
        self._mark_flags(say.stands_out(flags))
        self.flags.setVisible(bool(flags))
        self.note.setText(f"note: {claim.note}")
        self.note.setVisible(bool(claim.note))
        self._show_candidates(session, row, claim)
        candidate = self._workbench.candidate()
        self.facts.show_claim(claim, candidate.species if candidate is not None else "")
        self.area.fit()
        self.siblings.show_candidate(session, candidate)

    def _mark_flags(self, remarkable: bool) -> None:
        """What stands out is written as plainly as the heading, the rest quietly."""
        name = "standsOut" if remarkable else "quiet"
        if self.flags.objectName() != name:
            self.flags.setObjectName(name)
            self.flags.style().unpolish(self.flags)
            self.flags.style().polish(self.flags)

    def _show_candidates(self, session, row: int, claim) -> None:
        chosen = min(self._workbench.view.now.candidate, max(len(claim.candidates) - 1, 0))
        hand = "hand" in session.features.flags[row].split()
        coming = int(session.features.number[row]) in self._workbench.weighing
        self.none_near.setText(
            say.WEIGHING if coming else say.HAND_PICKED if hand else say.NO_CANDIDATES)
        self.none_near.setVisible(not claim.candidates)
        for rank, widget in enumerate(self.rows):
            known = rank < _listed(claim)
            widget.setVisible(known)
            if known:
                self._fill(widget, session, row, claim, rank == chosen)
        self._fill_unlisted(claim)

    def _fill(self, widget: CandidateRow, session, row: int, claim, chosen: bool) -> None:
        candidate = claim.candidates[widget.rank]
        depth = float(session.features.depth[row])
        theme = self._workbench.theme
        name = say.candidate_name(candidate, session.spectrum.medium)
        mark = " ✓" if candidate == claim.line and claim.by == "person" else ""
        widget.name.setText(name + mark)
        widget.bar.show_value(
            candidate.probability, theme.colour(candidate.species, candidate.origin), theme.edge)
        widget.number.setText(words.probability(candidate.probability))
        widget.detail.setText(say.candidate_numbers(candidate, depth))
        widget.detail.setVisible(chosen or candidate.probability >= LEAST)
        widget.why.setVisible(chosen)
        widget.odds.show_terms(terms(candidate) if chosen else (), theme)
        if chosen:
            roll = next((r for r in session.roll_call if r.species == candidate.species
                         and r.verdict == "absent"), None)  # else Siblings counts them
            lines = (say.why(reasons(candidate, claim, depth, roll)), say.line_facts(candidate))
            widget.why.setText("\n".join(line for line in lines if line))
        widget.show_chosen(chosen)
        widget.setToolTip("Click to see its reasons and Siblings; Ctrl+Return accepts it")
        widget.setAccessibleName(
            f"Candidate {widget.rank + 1}: {name}, probability {candidate.probability:.2f}")

    def _fill_unlisted(self, claim) -> None:
        theme = self._workbench.theme
        self.unlisted.name.setText("unlisted line")
        self.unlisted.bar.show_value(claim.p_unlisted, theme.muted, theme.edge)
        self.unlisted.number.setText(words.probability(claim.p_unlisted))
        self.unlisted.detail.hide()
        self.unlisted.why.hide()
        self.unlisted.odds.hide()
        self.unlisted.setVisible(bool(claim.candidates))

    def _choose(self, rank: int) -> None:
        self._workbench.view.change(candidate=rank)

    def _name_species(self) -> None:
        if self._workbench.name_species(self.species.text()):
            self.species.clear()


def _listed(claim) -> int:
    hopeful = sum(c.probability >= LEAST for c in claim.candidates)
    accepted = [k + 1 for k, c in enumerate(claim.candidates) if c == claim.line]
    return min(SHOWN, len(claim.candidates), max(hopeful, 2, *accepted))


def _act_button(command, workbench) -> QPushButton:
    button = QPushButton(command.short or command.title)
    button.setObjectName("act")
    button.setToolTip(command.full_tip)
    button.setAccessibleName(command.title)
    button.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
    button.setMinimumWidth(button.fontMetrics().horizontalAdvance(button.text()) + 8)
    button.clicked.connect(lambda: workbench.run(command.id))
    return button


def _empty_page() -> QWidget:
    label = QLabel(say.EMPTY)
    label.setObjectName("emptyState")
    label.setWordWrap(True)
    label.setMargin(16)
    label.setAlignment(Qt.AlignmentFlag.AlignHCenter | Qt.AlignmentFlag.AlignVCenter)
    return label
