package resolve

// explanations are the texts of `tautspan why CODE`, also for the codes of the
// parser; codes of the form wants-... are explained from the kinds.
var explanations = map[string]string{
	"scope": `
What the language does not say, and no answer therefore covers:

- galloping and rain-wind onset, and wind that locks on to a line (say its band of frequencies by lets)
- parametric excitation
- coupling with a deck or a mast that moves by the line's own force
- whirling in three dimensions, two planes at once, torsion
- creep, and ice in three dimensions
- ropes that travel lengthwise; tension or length that changes during a run: step it as a let, and each answer is for the line standing still
- lines that touch one another
- doubtful inputs that hang together other than by a let that they share

What the language says and this version cannot do yet is refused with the code not-yet.`,
	"not-yet": `
The language can say this, and this version cannot compute it. It is refused rather than left out, because an answer without it would be an answer to another question.

The hint names a way around it where there is one.`,
	"reading-without-doubt": `
A fit weighs each reading by its doubt. Where none is said, one that is wide for the trade stands in its place, and the message says which: 0.5 % of a frequency, 0.2 s for a stopwatch in the hand, 10 % of a damping ratio (common practice, no source). Say the doubt of the reading, and the interval of the answer becomes one that can be defended.`,
	"unknown-name": `
Nothing in the scenario, nor in the files that it uses, has this name, or what has it is of another kind. Names differ by capitals. The order of statements does not matter.

Statements at the top of a file share one set of names. The supports, segments and joints of a line have a set of their own; where two lines share a name, LINE.NAME tells them apart.`,
	"ambiguous-name": `
More than one thing has this name. A part of a line is told apart by LINE.NAME; a column of a table by its number.`,
	"duplicate-name": `
Two statements give the same name. Statements at the top of a file share one set of names whatever their kind, so that a name means one thing wherever it is read. Parts of a line share one set within their line, and none may be called as a line is.`,
	"reserved-name": `
This name has a meaning of its own in expressions: x the place, t the time, u and v displacement and velocity in a law, pi and g0 (standard gravity, 9.80665 m/s^2); mean stands for the mean tension of a line.`,
	"no-such-argument": `
t has a value only in a history (behind "with"), x only along a stretch (start, press), u and v only in a law.`,
	"not-a-value": `
A number is wanted here, and this is the name of something else. A watch is a record over time: take one value of it with peak, rms, final, highest, lowest or another measure.`,
	"unknown-unit": `
The unit table has no such unit. Capitals matter: kN, MPa, Hz, kg. Units are m g s N Pa J W Hz rad K with prefixes from n to G, and without prefix t deg min h % degC degF ft in yd mi lb lbf kip psi ksi mph kgf; B with k, M, G for memory. A product is written with *, at most one / stands in a unit, with one unit or a bracket behind it: N*s/m^2, W/(m^2*K), 1/K.`,
	"unit-mismatch": `
Quantities of different dimension are added, compared or otherwise held against one another. Every expression is checked before anything runs. A quantity with a unit may be raised only to a power that is written out, and a root must leave whole powers.`,
	"missing-unit": `
Only a pure number has no unit. In a list the unit behind the last number holds for all of them.`,
	"tonnes-or-time": `
Directly behind a number stands its unit, so that 3 N*t reads as three newton-tonnes. For three newtons times the time t, write blanks: 3 N * t.`,
	"temperature-scale": `
degC and degF are points of a scale with a zero of its own, so they can be compared, and a difference can be taken or added, but they cannot be added to one another, multiplied or negated. Write differences in K.`,
	"circular-lets": `
These lets are computed from one another, so none of them has a value. Give one of them a number.`,
	"circular-use": `
These files use one another in a circle. Put what they share into a file that both use.`,
	"use-outside": `
Files are named relative to the file that names them, with / between folders, and must lie in the scenario's folder or below it. That keeps a scenario whole when its folder is moved or handed on.`,
	"not-taken": `
"use" takes let, stock and law statements from a file. Everything else in it, such as lines and runs, is left out.`,
	"unreadable-file": `
A file that the scenario names, or the scenario itself, cannot be opened or read. The reason follows the message.`,
	"file-too-large": `
The file is larger than what is read; its size is checked before reading. A scenario of that size is likely to be another file by mistake.`,
	"bad-bytes": `
Texts and tables are UTF-8. This file holds bytes that are not: it may have been saved in an older character set, or be no text at all.`,
	"doubt-form": `
Behind a quantity with a unit a doubt is in that unit, or in % of it. Behind a pure number the doubt is absolute and written in the same form as the number (0.5 % +- 0.1 %, or 0.05 +- 0.01); a relative one says so: +- 7 % of it.`,
	"said-twice": `
The same thing is said twice, and the two may differ. Leave one of them.`,
	"contradiction": `
These properties exclude one another: what is held in place does not move, so a spring, a dashpot or a mass there would do nothing; free and absorbing stand alone.`,
	"no-effect": `
What is written here changes no answer in this scenario. It may stand, and it may be a sign that something else was meant.`,
	"deep-sag": `
Everything here is computed for lines that hang shallow: straight chords, a tension that hardly varies, and the sag term of Irvine and Caughey where it is asked for. That theory is used up to a sag of one eighth of the span. Beyond it the catenary's shape and the change of tension along it count, and frequencies, travel times and the drop itself are off by more than the bars tell: by some 4/3 (sag/span)^2 of the drop, 2 % at one eighth, 8 % at a quarter.

A higher tension, or the parts between inner supports as lines of their own, may be what was meant.`,
	"not-linear": `
A natural frequency and a damping ratio belong to a line whose motion grows in proportion to what drives it. With friction, a stop, a written law, a tie that goes slack or tension that grows with amplitude they would hang on the amplitude, and a damper known only by its bench record has values at real frequencies alone. The program refuses instead of putting a straight line in their place.

Ask a run: settle, peak, rms and reach are defined for any motion, and the share of energy left tells what a damper took.`,
	"rests-on-stop": `
A stop acts once the line has moved through its gap, measured from rest. With a gap of zero or less the line would lie on the stop at rest, pressed against it by an unknown force, and its rest would not be the one from which displacements are counted. Give the gap as it is measured, above zero.`,
	"law-at-rest": `
u is measured from static equilibrium, in which every force at rest is counted already. A law that gives a force at u = 0 and v = 0, with its states at their start, moves the line away from there as soon as the run begins. That may be meant (a force that depends on time); more often a sign or a start value is wrong.`,
	"bench-drives": `
The real part of an impedance, force per velocity, is what takes power from the line: half of it times the square of the velocity's amplitude. Below zero the damper would drive the line. A bench can measure that near the edge of its range, or the sign or the order of the columns is wrong.`,
	"misplaced": `
The language has this, and not in this place.`,
	"missing-property": `
A property is missing without which nothing can be computed: a stock needs its mass (or density with an area), a segment needs a tension from itself or its line.`,
	"line-ends": `
A line is written in the order in which you would walk it, and begins and ends with a support, with at least one segment between.`,
	"line-order": `
Between two supports or joints stands a segment. A line ends with its second support; an inner support is a joint that is fixed. Everything that acts at one place belongs to one joint.`,
	"tension-change": `
The tension of a line changes only where something holds the difference: a joint that says "holds". The force that it must hold is reported.`,
	"wrong-place": `
A point is wanted where a stretch is named, or the other way round, or this place cannot take what is asked of it. A point of a segment is written SEGMENT LENGTH or SEGMENT PERCENT.`,
	"place-outside": `
The place lies outside its segment. Distances are counted from the segment's start in walking order.`,
	"not-finite": `
The expression has no finite value: a division by zero, the root or logarithm of a negative number, or a number too large to compute with.`,
	"not-positive": `
Lengths, masses per length, tensions, durations and the like must be greater than zero, with the values that the lets have now.`,
	"negative": `
Masses, springs, dashpots and losses must not be negative: such a line would gain energy from nothing.`,
	"out-of-range": `
The value lies outside what can be asked here; the message says the range.`,
	"empty-range": `
A range runs from its lower to its higher end, and the two differ.`,
	"too-many-rows": `
The run would write more rows, or the table holds more, than are taken. A row every tenth of the shortest period of interest is plenty; make "every" longer or "for" shorter.`,
	"too-few-rows": `
"every" is longer than "for", so that there would be no record.`,
	"too-many": `
There is a limit to the number of segments and of used files in one scenario; the message says it.`,
	"too-long": `
The expression has too many parts to be computed with. Give parts of it names with let.`,
	"start-jumps": `
A start displacement should be zero at every support that is held, and where its stretch ends within the line; otherwise the line has a step there, which no real line has and which no two solvers treat alike. Several starts add up, so that the sum may still be sound.`,
	"short-segment": `
A segment is shorter than a millionth of the longest. That is usually a slip in a unit; if it is meant, rounding will show in the answers.`,
	"wrong-arguments": `
The number or the form of the values in the brackets is not what this function, history or measure takes; the hint shows the form.`,
	"wants-motion": `
A support is moved by a displacement (m), a velocity (m/s) or an acceleration (m/s^2); the unit of the history says which.`,
	"wants-let": `
Only a let can be varied, sought or met: give the value a name with let.`,
	"wants-order": `
Modes, fronts and returns are counted 1, 2, 3, ...; the number is written out, since it names one of them and is not a quantity.`,
	"wants-record": `
This measure is taken of what a watch records, written WATCH.QUANTITY, such as mid.displacement.`,
	"unknown-word": `
In this place only certain words may stand, and this is none of them.`,
	"missing-parameter": `
A plugin's load or law takes its parameters by name, each with its unit, in brackets behind its name.
Those without a preset must be said. 'tautspan plugins show NAME' lists them.`,
	"unknown-parameter": `
The plugin takes no parameter of that name. 'tautspan plugins show NAME' lists what it takes, with
units, ranges and presets.`,
	"unknown-plugin": `
A name in quotes behind solvers, load or law is that of a plugin, and none of that name and kind is
installed. Nothing is found by accident: 'tautspan plugins add PATH' looks at a plugin and records the
checksum of its file; 'tautspan plugins list' shows what is installed and what it takes.`,
	"unknown-solver": `
No solver of this name is known. Leave "solvers" out to run every solver that can represent the scenario.`,
	"unknown-column": `
The table has no such column. A column is named as in the table's first row, in quotes, or by its number from 1.`,
	"table-empty": `
A table needs two rows of numbers at least.`,
	"table-form": `
A table is a CSV file: UTF-8 text, columns separated by commas, numbers with a decimal point, and usually one first row with the names of the columns.`,
	"table-ragged": `
A row has more or fewer fields than the first. Usually a comma is missing, or decimal commas were used.`,
	"table-number": `
A field of a column that is read holds no finite number. Numbers are written with a decimal point and without a unit; the unit of a column is said in the scenario.`,
	"table-order": `
The times of a table must rise from row to row.`,
	"bad-override": `
A value from outside is given as NAME=QUANTITY, with the quantity written as in a let, its doubt included: pull=412 kN +- 2 %.`,
	"cannot-bind": `
The scenario reads well, and a value of it cannot stand when it is put together. The message names the value.`,
	"unlikely-mass": `
The mass per length lies outside 0.00001 to 200 kg/m, from an instrument wire to the largest stay. It may be right; most often a unit is wrong.`,
	"unlikely-tension": `
The tension lies outside 0.5 N to 20 MN.`,
	"unlikely-share": `
The tension is an unusual share of the strength of the stock: lines of all trades stand between 3 % and 60 %. Guys are usual at 5 to 15 %, conductors at 15 to 25 %, stays at 30 to 45 %, tendons and strings at 40 to 65 %.`,
	"unlikely-young": `
The modulus lies outside 50 to 210 GPa: ropes have 75 to 120, strands 150 to 195, steel wire 190 to 210, copper about 117, aluminium with a steel core 66 to 84. Lines of fibre lie below.`,
	"unlikely-loss": `
The damping ratio of a bare line is usually between 0.02 % and 0.5 %. More comes from dampers, which are said at joints.`,
	"unlikely-density": `
Mass and area together make a density outside 2700 to 9100 kg/m^3, from aluminium to copper. A miss usually means that a unit of one of them is wrong. Lines of fibre lie below.`,
	"unlikely-wave-speed": `
Waves on lines of the trade run between 20 and 500 m/s. Outside, a unit of the tension or of the mass is likely to be wrong.`,
	"unlikely-strain": `
The tension would stretch the line by more than 1 %; the axial stiffness, the area or the modulus is likely to be wrong.`,
	"unlikely-agree": `
Solvers in double precision do not agree so closely on anything that takes many steps.`,
	"sag-matters": `
The line sags enough for its first frequency in the vertical plane to be higher than that of a straight string. lambda squared, (m g L cos(incline)/T)^2 L EA/(T Le), measures it; above 0.1 the first vertical mode is remarked on. "sag included" takes it in. Other modes, and everything sideways ("plane sideways"), are hardly changed.`,
	"bending-matters": `
The line is computed as an ideal string, although what is known of its metal allows a bending stiffness that would show. xi = L*sqrt(T/EI) measures it, here with EI of a solid bar of the same metal area, the most that there can be; clamped ends raise the first frequency by about 2/xi and a tension worked out from it by 4/xi, which is 1 % at 400. The true EI of wires lies between that of wires that slide on one another and that of the bar, often a factor of ten to a hundred apart. Say it with "bending", as a doubtful let if need be.`,
	"bending-unsaid": `
A solid round bar has the bending stiffness E pi d^4/64. What is made of wires, or is not solid, has one between two bounds that lie far apart: the sum of its wires if they slide on one another, and a solid bar of the same metal area if they do not. Which of them holds depends on tension and amplitude, so it is not guessed. Say "bending", perhaps by a doubtful let such as "between 40 N*m^2 and 300 N*m^2", or "bending 0 N*m^2" to treat the line knowingly as an ideal string.`,
	"unlikely-bending": `
The bending stiffness lies more than a factor of two outside the bounds that follow from the metal: wires that slide on one another, and a solid bar of the same area. A unit, the modulus or the area is likely to be wrong.`,
	"turning-unsaid": `
On a line with bending stiffness an end that is held must say how it turns, because the answers hang on it: "pinned" turns freely, "clamped" does not turn, "fixed, rotary KR" turns against a rotary spring. "fixed, turning" is the same as pinned, "fixed, guided" the same as clamped. Where the bending stiffness is a let, this is asked for whatever its value.`,
	"turning-assumed": `
This support gives across the line and does not say how it turns; nothing that was said holds it from turning, so it is taken to turn freely. Say "turning" to confirm, "guided" if it does not turn, or "rotary KR".`,
	"absorbs-partly": `
An absorbing end is a dashpot of the impedance sqrt(T m) that turns freely. That takes in every wave of an ideal string. On a line with bending it takes in long waves, and part of the short ones comes back.`,
	"tension-place": `
The tension of an inclined line grows uphill by its own weight, m g sin(incline) a metre, and by the weight of its joints. A tension therefore holds at one place, which is said: "tension 412 kN at deck" (a support, a joint, or a place in a segment), or "at mean" for the mean over the length.`,
	"stock-unseen": `
This stock comes from the built-in list, and its mass per length was not read from the source named there but is remembered or worked out from remembered numbers. "tautspan stock NAME" shows where each value comes from. Hold it against the certificate of the line, and say a stock of your own where they differ.`,
	"missing-version": `
A file begins with "tautspan 1", the version of the language that it is written in.`,
	"unknown-version": `
The file asks for a version of the language that this program does not know.`,
	"unknown-statement": `
No statement begins with this word here. The hint names the nearest word that does; inside braces only the statements of that block may stand.`,
	"brace-line": `
A statement that opens a block ends with its brace, and the closing brace has a line of its own.`,
	"open-brace": `
A block is opened and never closed. The message shows where it was opened.`,
	"stray-brace": `
A brace closes nothing, or opens a block where none may stand.`,
	"open-bracket": `
A round bracket is opened and not closed.`,
	"stray-bracket": `
A round or square bracket closes nothing: its partner is missing before it, or it stands once too often.`,
	"open-text": `
A text in double quotes ends on the line on which it begins.`,
	"same-line": `
One statement stands on one line. It goes on behind a comma, an operator, or inside round brackets.`,
	"trailing-comma": `
The statement ends with a comma, and nothing follows.`,
	"trailing-sign": `
The expression ends with an operator, and nothing follows.`,
	"missing-comma": `
The parts of a list, and the properties of one thing, are separated by commas.`,
	"missing-equals": `
A value is given with = between the name and the value.`,
	"double-equals": `
A value is given with one =.`,
	"missing-quantity": `
A number with its unit is missing here.`,
	"misplaced-word": `
This word stands where another is wanted; the message says which.`,
	"needs-brackets": `
Where values stand side by side without a comma, one that is more than a quantity stands in round brackets: upper (reach), tuned 3 kg (stiff / 2) loss 0.3.`,
	"side-by-side": `
Two values stand side by side without an operator or a comma.`,
	"touching-bracket": `
The bracket of a function touches its name; a bracket behind a blank begins an expression.`,
	"lone-percent": `
A percent sign stands without a number before it.`,
	"bare-point": `
A number has digits on both sides of its decimal point.`,
	"strange-sign": `
This character has no meaning in the language. Letters that only look like signs are usual after copying from a document.`,
	"unit-shape": `
A unit is one word: factors joined by *, at most one /, with one unit or a bracket behind it, and whole powers.`,
	"too-deep": `
Brackets are nested too deeply to be read. Give the inner parts names with let.`,
	"unreadable": `
The reader of the language met a text that it cannot take apart. Please report it together with the file.`,
	"syntax": `
The statement does not have the form that its first word asks for. The hint shows the form, with capitals for what you put in.`,
	"wants-value": `
A value is missing or out of place here: a number with its unit, a let, or an expression.`,
	"wants-name": `
A name stands here: a letter, then letters, digits and underscores.`,
	"wants-place": `
A place stands here: the name of a support, joint, segment or line, or SEGMENT LENGTH or SEGMENT PERCENT.`,
	"wants-call": `
A name with values in brackets stands here, such as table("file.csv", ...) or slider(hold = 200 N).`,
	"wants-property": `
A property stands here; the hint shows which are usual.`,
	"wants-quantity": `
The name of a quantity stands here: displacement, velocity, acceleration, slope, force, moment or tension.`,
	"wants-unit": `
A unit stands behind the word "unit", such as unit kN.`,
	"wants-column": `
A column of a table stands here: its name in quotes, or its number from 1.`,
	"wants-text": `
A text in double quotes stands here.`,
	"wants-block": `
A block in braces stands here: { at the end of this line, the statements, and } on a line of its own.`,
	"wants-loss": `
A kind of loss stands here: viscous, ratio, internal, hysteretic or law.`,
	"wants-word": `
One of certain words stands here; the message lists them.`,
}
