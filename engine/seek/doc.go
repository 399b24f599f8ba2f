// Package seek finds, over one number in a range, where functions are zero and
// where one is best, with the doubt that other numbers leave. It knows nothing of
// lines: a function is whatever gives values for a place and for values of the
// doubtful inputs. All that is said of what lies between the places looked at
// rests on the step between them, which is given with the answer.
package seek
