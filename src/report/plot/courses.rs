//! Which courses are drawn, over which axes, with which lines across them.

use super::super::words::{clean, down, glued, list, pair, time, typed, up, whole};
use super::axis::{Axis, TimeUnit, seconds, volts};
use crate::plan::{CurvePair, CurveSpan, CurveTool, CurveVoltage, Curves, Plan};
use crate::quantity::{Power, Quantity, Temperature, Time, Voltage, celsius};

/// Pairs whose curves differ by less than this share are drawn as one: a line in print is wider.
const ALIKE: f64 = 0.02;

/// Power in watt below which the course of a tool is not worth a plot.
const LEAST_POWER: f64 = 1e-3;

/// Characters of a line's name that fit beside it.
const LONGEST_NAME: usize = 46;

/// Everything that one plot shows.
#[derive(Debug, Clone)]
pub(super) struct Course {
    pub title: String,
    pub description: String,
    pub across: Axis,
    pub up: Axis,
    /// Moments on the axis with the highest credible value.
    pub highest: Vec<(f64, f64)>,
    /// The same with every value nominal; empty where only the highest is known.
    pub nominal: Vec<(f64, f64)>,
    pub levels: Vec<Level>,
    pub marks: Vec<Mark>,
    /// The unit of the time, where its axis is even.
    pub unit: Option<TimeUnit>,
}

/// A line across a plot.
#[derive(Debug, Clone)]
pub(super) struct Level {
    pub value: f64,
    /// From when on it counts; the left end where it always does.
    pub from: Option<f64>,
    pub name: String,
}

/// A step along the time.
#[derive(Debug, Clone)]
pub(super) struct Mark {
    pub from: f64,
    pub to: f64,
    pub name: String,
}

/// The spans of the steps, or the one without any, and the span after the last step.
fn split<'a>(plan: &Plan, curves: &'a Curves) -> (&'a [CurveSpan], Option<&'a CurveSpan>) {
    match curves.spans.split_last() {
        Some((last, steps)) if !plan.steps.is_empty() && last.step.is_none() => (steps, Some(last)),
        _ => (&curves.spans, None),
    }
}

/// The lowest voltage that is drawn: a hundredth of the touch voltage, and below what a hold point asks for.
fn lowest(plan: &Plan) -> f64 {
    let holds = plan.steps.iter().filter_map(|step| step.hold.as_ref()).map(|hold| hold.below.si() / 10.0);
    let positive = |v: &f64| *v > 0.0;
    let touch = plan.touch_voltage.si() / 100.0;
    let low = holds.chain([touch]).filter(positive).fold(f64::INFINITY, f64::min);
    if low.is_finite() { low } else { 1e-3 }
}

fn greatest(curves: &Curves, pairs: &[usize]) -> f64 {
    let samples = curves.spans.iter().flat_map(|span| &span.samples);
    samples.flat_map(|s| pairs.iter().filter_map(|p| s.voltages.get(*p))).map(|v| v.highest.si()).fold(0.0, f64::max)
}

/// Pairs whose curves can't be told apart in print, by number.
fn alike(curves: &Curves, floor: f64) -> Vec<Vec<usize>> {
    let mut groups: Vec<Vec<usize>> = Vec::new();
    let near = |a: Voltage, b: Voltage| {
        let (a, b) = (a.si().max(floor), b.si().max(floor));
        (a - b).abs() <= ALIKE * a.max(b)
    };
    let same = |x: &CurveVoltage, y: &CurveVoltage| near(x.nominal, y.nominal) && near(x.highest, y.highest);
    let samples: Vec<_> = curves.spans.iter().flat_map(|span| &span.samples).collect();
    for pair in 0..curves.pairs.len() {
        let fits = |group: &&mut Vec<usize>| samples.iter().all(|s| same(&s.voltages[group[0]], &s.voltages[pair]));
        match groups.iter_mut().find(fits) {
            Some(group) => group.push(pair),
            None => groups.push(vec![pair]),
        }
    }
    groups
}

/// The one of a group that is highest: nothing is drawn lower than it is by more than a line's width.
fn leader(curves: &Curves, group: &[usize]) -> usize {
    let most = |p: usize| greatest(curves, &[p]);
    group.iter().copied().reduce(|a, b| if most(b) > most(a) { b } else { a }).unwrap_or(0)
}

fn name(of: &CurvePair) -> String {
    if of.test_point {
        pair(&of.across)
    } else {
        format!("{} (no test point: {})", pair(&of.across), list(&of.capacitors))
    }
}

fn names(curves: &Curves, group: &[usize]) -> String {
    list(&group.iter().map(|p| name(&curves.pairs[*p])).collect::<Vec<_>>())
}

/// A plot for every pair, those that look alike in one.
pub(super) fn voltages(plan: &Plan, curves: &Curves) -> Vec<Course> {
    let floor = lowest(plan);
    let (spans, _) = split(plan, curves);
    let end = spans.last().map_or(0.0, |span| span.end.si());
    let unit = TimeUnit::for_length(end);
    alike(curves, floor)
        .iter()
        .map(|group| {
            let leader = leader(curves, group);
            let top = greatest(curves, group).max(10.0 * floor).max(plan.touch_voltage.si());
            let points = |of: &dyn Fn(&CurveVoltage) -> Voltage| -> Vec<(f64, f64)> {
                let samples = spans.iter().flat_map(|span| &span.samples);
                samples.map(|s| (s.time.si() / unit.seconds, of(&s.voltages[leader]).si())).collect()
            };
            Course {
                title: format!("Voltage at {}", names(curves, group)),
                description: description(plan, curves, group, spans),
                across: Axis::times(end.max(1e-9), unit),
                up: Axis::powers(floor, top, "voltage", volts),
                highest: points(&|v| v.highest),
                nominal: points(&|v| v.nominal),
                levels: levels(plan, curves, group, end, unit),
                marks: marks(plan, spans, unit),
                unit: Some(unit),
            }
        })
        .collect()
}

/// The same voltage drawn again over the time in which there is something to see, where that is a small part of it.
pub(super) fn closer(course: &Course) -> Option<Course> {
    const SMALL: f64 = 0.25;
    let over = |(_, v): &&(f64, f64)| *v > course.up.low * 1.0001;
    let last = course.highest.iter().rev().find(over)?.0;
    if last <= 0.0 || last > SMALL * course.across.high {
        return None;
    }
    let unit = course.unit?;
    let seconds = 1.15 * last * unit.seconds;
    let finer = TimeUnit::for_length(seconds);
    let factor = unit.seconds / finer.seconds;
    let end = seconds / finer.seconds;
    let inside = |points: &[(f64, f64)]| -> Vec<(f64, f64)> {
        let scaled: Vec<(f64, f64)> = points.iter().map(|(t, v)| (t * factor, *v)).collect();
        let mut inside: Vec<(f64, f64)> = scaled.iter().copied().filter(|(t, _)| *t <= end).collect();
        // The line goes on to the edge, where the next moment lies beyond it.
        if let (Some(&(t0, v0)), Some(&(t1, v1))) = (inside.last(), scaled.get(inside.len())) {
            let share = (end - t0) / (t1 - t0);
            let by_factors =
                (v0.max(f64::MIN_POSITIVE).ln() * (1.0 - share) + v1.max(f64::MIN_POSITIVE).ln() * share).exp();
            inside.push((end, by_factors));
        }
        inside
    };
    let marks = course.marks.iter().filter(|mark| mark.from * factor < end);
    let levels = course.levels.iter().filter(|level| level.from.is_none_or(|from| from * factor < end));
    Some(Course {
        title: format!("{}, the first {}", course.title, whole(Time::from_si(seconds))),
        description: format!("The same, drawn over the first {}.", whole(Time::from_si(seconds))),
        across: Axis::times(seconds, finer),
        highest: inside(&course.highest),
        nominal: inside(&course.nominal),
        levels: levels.map(|level| Level { from: level.from.map(|from| from * factor), ..level.clone() }).collect(),
        marks: marks
            .map(|mark| Mark { from: mark.from * factor, to: (mark.to * factor).min(end), name: mark.name.clone() })
            .collect(),
        unit: Some(finer),
        up: course.up.clone(),
    })
}

/// In words what the plot shows.
fn description(plan: &Plan, curves: &Curves, group: &[usize], spans: &[CurveSpan]) -> String {
    let leader = leader(curves, group);
    let at = |v: &CurveVoltage| format!("up to {} (nominal {})", up(v.highest), up(v.nominal));
    let first = spans.first().and_then(|s| s.samples.first()).and_then(|s| s.voltages.get(leader));
    let last = spans.last().and_then(|s| s.samples.last()).map(|s| (s.time, s.voltages.get(leader)));
    let mut text = format!("{}: {} at isolation", names(curves, group), first.map_or_else(String::new, at));
    if let Some((when, Some(voltage))) = last {
        text.push_str(&format!("; {} at {}", at(voltage), whole(when)));
    }
    let waits = group.iter().filter_map(|p| plan.waits.iter().find(|w| w.across == curves.pairs[*p].across));
    let waits: Vec<Option<Time>> = waits.map(|w| w.keep).collect();
    if !waits.is_empty() {
        let longest = waits.iter().map(|w| w.map_or(f64::INFINITY, Quantity::si)).fold(0.0, f64::max);
        let touch = typed(plan.touch_voltage);
        text.push_str(&if longest.is_finite() {
            format!("; with nobody doing anything predicted below {touch} from {} on", time(Time::from_si(longest)))
        } else {
            format!("; with nobody doing anything never below {touch}")
        });
    }
    text + "."
}

fn levels(plan: &Plan, curves: &Curves, group: &[usize], end: f64, unit: TimeUnit) -> Vec<Level> {
    let touch = plan.touch_voltage;
    let mut levels = vec![Level { value: touch.si(), from: None, name: format!("touch voltage {}", typed(touch)) }];
    for limit in &plan.limits {
        let Some((allowed, within)) = limit.allowed_voltage.zip(limit.within) else { continue };
        let here = group.iter().any(|p| {
            let of = &curves.pairs[*p];
            of.test_point && (limit.everywhere || same_pair(&of.across, &limit.across))
        });
        if here && within.si() <= end {
            let name = format!("{}: {} from {}", clean(&limit.id), typed(allowed), whole(within));
            levels.push(Level { value: allowed.si(), from: Some(within.si() / unit.seconds), name: shortened(&name) });
        }
    }
    levels
}

fn same_pair([a, b]: &[String; 2], [c, d]: &[String; 2]) -> bool {
    (a == c && b == d) || (a == d && b == c)
}

fn shortened(name: &str) -> String {
    let mut short: String = name.chars().take(LONGEST_NAME).collect();
    if short.len() < name.len() {
        short.push('…');
    }
    short
}

fn marks(plan: &Plan, spans: &[CurveSpan], unit: TimeUnit) -> Vec<Mark> {
    let steps = spans.iter().filter_map(|span| Some((span, span.step?)));
    let mark = |(span, step): (&CurveSpan, usize)| Mark {
        from: span.start.si() / unit.seconds,
        to: span.end.si() / unit.seconds,
        name: step.to_string(),
    };
    if plan.steps.is_empty() { Vec::new() } else { steps.map(mark).collect() }
}

/// What comes back after the last step, for the pairs where something does.
pub(super) fn afterwards(plan: &Plan, curves: &Curves) -> Vec<Course> {
    let (_, Some(last)) = split(plan, curves) else { return Vec::new() };
    let floor = lowest(plan);
    let length = last.end.si() - last.start.si();
    let comes_back = |group: &Vec<usize>| {
        last.samples.iter().any(|s| group.iter().any(|p| s.voltages.get(*p).is_some_and(|v| v.highest.si() > floor)))
    };
    let groups = alike(curves, floor).into_iter().filter(comes_back);
    groups
        .map(|group| {
            let leader = leader(curves, &group);
            let points = |of: &dyn Fn(&CurveVoltage) -> Voltage| -> Vec<(f64, f64)> {
                let since = last.samples.iter().map(|s| (s.time.si() - last.start.si(), s));
                since.filter(|(t, _)| *t > 0.0).map(|(t, s)| (t, of(&s.voltages[leader]).si())).collect()
            };
            let highest = points(&|v| v.highest);
            let top = highest.iter().map(|(_, v)| *v).fold(10.0 * floor, f64::max).max(plan.touch_voltage.si());
            let greatest = highest.iter().copied().reduce(|a, b| if b.1 > a.1 { b } else { a }).unwrap_or_default();
            Course {
                title: format!("After the last step: {}", names(curves, &group)),
                description: format!(
                    "{}, the bank left as the last step leaves it: up to {}, {} after its end.",
                    names(curves, &group),
                    up(Voltage::from_si(greatest.1)),
                    time(Time::from_si(greatest.0))
                ),
                across: Axis::powers(1e-1, length, "time from the end of the last step", seconds),
                up: Axis::powers(floor, top, "voltage", volts),
                highest,
                nominal: points(&|v| v.nominal),
                levels: vec![Level {
                    value: plan.touch_voltage.si(),
                    from: None,
                    name: format!("touch voltage {}", typed(plan.touch_voltage)),
                }],
                marks: Vec::new(),
                unit: None,
            }
        })
        .collect()
}

/// What to say where nothing that would be drawn comes back.
pub(super) fn nothing_comes_back(plan: &Plan, curves: &Curves) -> String {
    let left = split(plan, curves).1.map_or(0.0, |last| {
        let voltages = last.samples.iter().flat_map(|s| s.voltages.iter().map(|v| v.highest.si()));
        voltages.fold(0.0, f64::max)
    });
    format!(
        "After the last step no pair is predicted above {} for as long as the bank is left as it then is, so there is \
         no plot of it.",
        up(Voltage::from_si(left))
    )
}

/// Power of every tool, and its body temperature where there is one, in the steps that connect it and between them.
pub(super) fn tools(plan: &Plan, curves: &Curves) -> Vec<Course> {
    let (spans, _) = split(plan, curves);
    let mut courses = Vec::new();
    for (i, tool) in curves.tools.iter().enumerate() {
        let Some((from, to)) = in_use(plan, tool) else { continue };
        let used: Vec<&CurveSpan> = spans.iter().filter(|s| s.step.is_some_and(|n| n >= from && n <= to)).collect();
        let (Some(first), Some(last)) = (used.first(), used.last()) else { continue };
        let start = first.start.si();
        let unit = TimeUnit::for_length(last.end.si() - start);
        let points = |of: &dyn Fn(&crate::plan::ToolLoad) -> Option<f64>| -> Vec<(f64, f64)> {
            let samples = used.iter().flat_map(|span| &span.samples);
            samples.filter_map(|s| Some(((s.time.si() - start) / unit.seconds, of(s.tools.get(i)?)?))).collect()
        };
        let across = || {
            let mut axis = Axis::times((last.end.si() - start).max(1e-9), unit);
            axis.name = format!("time from the start of step {from} in {}", unit.name);
            axis
        };
        let marks: Vec<Mark> = used
            .iter()
            .filter_map(|span| Some((span, span.step?)))
            .map(|(span, step)| Mark {
                from: (span.start.si() - start) / unit.seconds,
                to: (span.end.si() - start) / unit.seconds,
                name: step.to_string(),
            })
            .collect();
        let element =
            if tool.elements == 1 { String::new() } else { format!(", one of its {} elements", tool.elements) };
        let who = glued(&format!("{} ({})", clean(&tool.id), tool.role));
        let watts = points(&|t| Some(t.power.si()));
        if watts.iter().any(|(_, watt)| *watt >= LEAST_POWER) {
            courses.push(power(tool, &who, &element, across(), watts, marks.clone()));
        }
        let heat = points(&|t| t.temperature.map(celsius));
        if !heat.is_empty() {
            courses.push(temperature(plan, tool, &who, &element, across(), heat, marks));
        }
    }
    courses
}

/// In words, the tools whose power is not worth a plot.
pub(super) fn idle_tools(curves: &Curves) -> Option<String> {
    let peak = |i: usize| {
        let samples = curves.spans.iter().flat_map(|span| &span.samples);
        samples.filter_map(|s| s.tools.get(i)).map(|t| t.power.si()).fold(0.0, f64::max)
    };
    let idle = curves.tools.iter().enumerate().map(|(i, tool)| (tool, peak(i))).filter(|(_, p)| *p < LEAST_POWER);
    let names: Vec<String> =
        idle.map(|(tool, p)| format!("{} (up to {} in one element)", clean(&tool.id), up(Power::from_si(p)))).collect();
    (!names.is_empty()).then(|| format!("Without a plot of its power, which is below a milliwatt: {}.", list(&names)))
}

/// The first and the last step in which a tool is connected.
fn in_use(plan: &Plan, tool: &CurveTool) -> Option<(usize, usize)> {
    let steps = (1..).zip(&plan.steps);
    let first = steps.clone().find(|(_, s)| s.connect.contains(&tool.id))?.0;
    let off = steps.filter(|(n, s)| *n > first && s.disconnect.contains(&tool.id)).map(|(n, _)| n - 1).max();
    Some((first, off.unwrap_or(plan.steps.len())))
}

fn power(
    tool: &CurveTool,
    who: &str,
    element: &str,
    across: Axis,
    highest: Vec<(f64, f64)>,
    marks: Vec<Mark>,
) -> Course {
    let peak = highest.iter().map(|(_, p)| *p).fold(0.0, f64::max);
    let allowed = tool.allowed_power;
    // A rating far above what the part bears would leave no room for the curve; it stands in the text then.
    let in_sight = allowed.filter(|a| a.si() <= 100.0 * peak);
    let top = in_sight.map_or(peak, |a| a.si().max(peak));
    let watts = |value: f64| typed(Power::from_si(format!("{value:.3e}").parse().unwrap_or(value)));
    let beside = allowed.map_or_else(String::new, |a| format!("; {} allowed continuously", down(a)));
    Course {
        title: format!("Power of {who}{element}"),
        description: format!("{who}{element}: up to {}{beside}.", up(Power::from_si(peak))),
        across,
        up: Axis::powers(1e-4 * top, top, "power", watts),
        highest,
        nominal: Vec::new(),
        levels: in_sight
            .map(|a| Level { value: a.si(), from: None, name: format!("allowed continuously {}", down(a)) })
            .into_iter()
            .collect(),
        marks,
        unit: None,
    }
}

fn temperature(
    plan: &Plan,
    tool: &CurveTool,
    who: &str,
    element: &str,
    across: Axis,
    highest: Vec<(f64, f64)>,
    marks: Vec<Mark>,
) -> Course {
    let peak = highest.iter().map(|(_, c)| *c).fold(f64::NEG_INFINITY, f64::max);
    let from_celsius = |c: f64| up(Temperature::from_si(c + crate::quantity::CELSIUS_ZERO_K));
    let allowed = tool.allowed_temperature;
    let beside = allowed.map_or_else(String::new, |a| format!("; its rating ends at {}", down(a)));
    let low = celsius(plan.ambient).floor().min(peak.floor());
    let high = allowed.map_or(peak, |a| celsius(a).max(peak)).max(low + 1.0);
    Course {
        title: format!("Body temperature of {who}{element}"),
        description: format!("{who}{element}: up to {}{beside}.", from_celsius(peak)),
        across,
        up: Axis::even(low, high, "°C"),
        highest,
        nominal: Vec::new(),
        levels: allowed
            .map(|a| Level { value: celsius(a), from: None, name: format!("end of its rating {}", down(a)) })
            .into_iter()
            .collect(),
        marks,
        unit: None,
    }
}
