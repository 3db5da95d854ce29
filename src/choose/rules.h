// Every number that decides where a screen looks, in one place.
#ifndef CHOOSE_RULES_H
#define CHOOSE_RULES_H

// Orders of one mount and axis whose worst forces are kept: more than anybody looks at.
#define MOUNT_ORDERS_MOST 64
// Share of a mount's largest force below which an order is not told.
#define MOUNT_SHARE 1e-3

#define RAD_PER_S_OF_RPM (3.14159265358979323846 / 30)

// A line is significant for a band when, at some grid speed and placement, its peak is at least
// this share of the limit's peak (sqrt 2 times the rms limit). A line below it moves a level at the
// limit by less than 0.004 dB; halfway between grid speeds 100 rpm apart, at 1500 rpm, it cannot
// hide a resonance over the limit whose damping ratio is above 0.001.
#define LINE_SHARE_OF_LIMIT 0.03
// The same where a band has no limit to compare with: share of the largest line of its quantity.
#define LINE_SHARE_OF_LARGEST 0.1
// The same for a scalar limit: share of its value.
#define LINE_SHARE_OF_SCALAR 0.1

// Unequal cylinders and cycles add to a level without being in its spectrum. Where they add this
// share of the limit at some grid speed, multiples of a working cycle's order, their strongest
// lines, are significant; where they add the larger share, every line then inside the counted band
// is.
#define COMB_SHARE_OF_LIMIT   0.03
#define UNEVEN_SHARE_OF_LIMIT 0.3

// Speeds just before and just after a line enters or leaves a counted band, rpm: far above
// rounding, far below what an engine can hold.
#define STEP_ASIDE_RPM 0.05

// Two speeds nearer than this share are one: far above rounding, far below any step.
#define SAME_SPEED 1e-9

// Widest bracket of a no-go edge, rpm; the result is promised to 0.5.
#define EDGE_RPM 0.1
// Ranges closer than this are one, rpm.
#define GAP_RPM 0.5

// Where a level is over its limit, or nearer to it than this, dB, speeds are added until their step
// is at most this share of the speed. Resonances narrower than that are met by the speeds at which
// lines cross modes.
#define NEAR_LIMIT_DB 3.0
#define STEP_SHARE    0.03
// A largest (or smallest) margin among the speeds met that misses the limit by less than this, dB,
// is followed to its true value by golden section, until the bracket is this narrow, rpm.
#define TURN_DB  1.0
#define TURN_RPM 0.5

// Stiffnesses that may scatter at a time.
#define SCATTER_ENTRIES_MOST 64
// Scatter of stiffness: widest step of a factor between two looks, and fewest looks on each side. A
// resonance of loss factor eta is eta wide in stiffness at half its power.
#define SCATTER_STEP  0.05
#define SCATTER_LOOKS 2
// All corners of the scatter are looked at up to so many entries.
#define SCATTER_CORNERS 4
// A smallest margin is followed until both ends of its bracket lie within half of this, dB; an
// entry that moves a margin by less is not followed.
#define SCATTER_DB 0.1
// Looks of one golden section and rounds over all entries at most.
#define SCATTER_SECTIONS 24
#define SCATTER_ROUNDS   3
// Half the step of the central difference in ln(stiffness): margins are good to some 1e-5 dB, so
// the slope to 1e-3 dB per unit.
#define SCATTER_SLOPE_STEP 0.005
// Less than this, dB, is no change: what is left over by the solvers' iterations.
#define SCATTER_NOISE_DB 1e-4

#endif
