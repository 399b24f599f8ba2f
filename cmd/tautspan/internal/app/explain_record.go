package app

// recordExplanations are the texts of what is said of records.
func recordExplanations() map[string]string {
	return map[string]string{
		"broken-row": `A row of the table does not read like the first row of numbers: another count of fields, or a field that is neither a number nor empty. A decimal comma in a table whose columns are separated by commas is the usual cause: write semicolons between columns, or decimal points.`,
		"broken-wav": `The head of the WAV file contradicts itself or the file ends before it should. Copy it from the logger again.`,
		"clipped":    `Several samples in a row stand at the largest or smallest value: the sensor or the logger was at the end of its range. Clipping makes frequencies that are not there and hides how the vibration decays. Measure again with a lower gain or a softer tap, or cut the stretch out with --from.`,
		"decay-not-straight": `A single vibration that dies away falls along a straight line when its amplitude is drawn in decibels. These do not: the line bends (two motions with different losses at almost one frequency, or losses that depend on amplitude) or beats (two frequencies that close, such as the two planes of a line).

No damping is told for them. A damping that is averaged over a bent decay depends on where the record begins and ends.`,
		"drift":           `The mean moves from the beginning to the end of the record by more than a third of its rms: temperature, a moving load, or an integrator. Frequencies far above it are not touched.`,
		"empty-record":    `Nothing, or next to nothing, is left to analyse: the file holds no samples, or --from and --to leave none.`,
		"gap":             `The time column jumps by more than eight samples. A spectrum across a gap is wrong, so that the longest stretch without one is used.`,
		"jitter":          `Time stamps stand off an even grid by more than the rounding of their digits explains: the logger did not sample evenly. The rate is that of the whole column. Uneven sampling broadens peaks, the more the nearer they are to half the sampling rate.`,
		"mains-hum":       `A frequency lies within a fifth of a hertz of 50 or 60 Hz, of twice to four times that, or of what folds down from there at this sampling rate. Hum does not die away and stays when the line is held.`,
		"missing-samples": `Rows or values are missing here and there. Up to one in a hundred, straight lines stand for them; more than that is refused.`,
		"no-data":         `No row of numbers was found in the first sixty lines, or no column beside the time. A table has rows of numbers, separated by commas, semicolons or tabs, with names above them, and units below the names if there are any.`,
		"no-peak": `Nothing stands clear of the noise, or the record is too short for what was asked. That is an answer about the record, not about the line.

A frequency needs several of its periods on record: for one hertz at least ten seconds, better a minute. Look at another channel, tap harder (softly, with a mallet), put the sensor away from the ends and from the middle, or ask with a lower --above, knowing that noise may pass for peaks.`,
		"no-time":           `No column is headed as a time, has a unit of time or begins at zero. Say which it is with --time COLUMN, or give the sampling rate with --rate '400 Hz' where there is none.`,
		"not-a-table":       `The file is neither a WAV file nor a table of text.`,
		"not-a-wav":         `The file begins like a WAV file and is none.`,
		"not-finite":        `A sample is not a number or infinite. The file was damaged or written by a program that failed.`,
		"nothing-in-it":     `Every sample of the channel is the same: nothing was connected, or the channel was off.`,
		"offset":            `The mean is larger than the vibration: gravity in an accelerometer, or an amplifier out of balance. It is taken off; frequencies are not touched, but the range left before clipping is smaller.`,
		"possible-alias":    `A vibration above half the sampling rate shows as a peak mirrored below it, and no analysis can tell it from a true one. Peaks in the upper fifth are the likeliest. Sample at five to ten times the highest frequency wanted (common practice), with the logger's filter on, and see whether the peak moves.`,
		"rounded-time":      `The logger writes its times with few digits. The rate is taken from the whole column, (last - first)/(rows - 1), so that rounding does no harm; one difference of stamps, or their median, would be off and every frequency with it.`,
		"time-stands-still": `The last time is not later than the first. Another column may be the time: --time COLUMN.`,
		"time-turns-back":   `A time is earlier than the one before it: columns are swapped, or two records stand in one file. The message names a column that rises evenly, if there is one.`,
		"too-long":          `So many samples are more than are held at once. Take one channel with --channel, or a stretch with --from and --to.`,
		"unknown-channel":   `No column or channel has that name or number. A table's channels are counted without its time column.`,
		"unknown-wav":       `Samples are read as PCM of 8, 16, 24 or 32 bit and as floating point of 32 or 64 bit; compressed forms are not, since they change what is measured.`,
	}
}
