//! Sets of resistances: closed spans, rising and apart. Ends at 0 and infinity stand for no end.

/// A closed span of resistances in ohm.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Span {
    pub low: f64,
    pub high: f64,
}

/// Spans in rising order that do not touch.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Spans(Vec<Span>);

impl Spans {
    /// Every resistance.
    pub fn all() -> Self {
        Spans(vec![Span { low: 0.0, high: f64::INFINITY }])
    }

    /// These spans, rising.
    pub fn of(spans: Vec<Span>) -> Self {
        Spans(spans)
    }

    pub fn as_slice(&self) -> &[Span] {
        &self.0
    }

    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// What lies in both.
    pub fn and(&self, other: &Spans) -> Spans {
        let mut both = Vec::new();
        for a in &self.0 {
            for b in &other.0 {
                let span = Span { low: a.low.max(b.low), high: a.high.min(b.high) };
                if span.low <= span.high {
                    both.push(span);
                }
            }
        }
        Spans(both)
    }

    /// The ends of the whole set.
    pub fn ends(&self) -> Option<Span> {
        Some(Span { low: self.0.first()?.low, high: self.0.last()?.high })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_lies_in_both_is_found_span_by_span() {
        let span = |low, high| Span { low, high };
        let a = Spans::of(vec![span(1.0, 3.0), span(5.0, 9.0)]);
        let b = Spans::of(vec![span(2.0, 6.0), span(8.0, f64::INFINITY)]);
        assert_eq!(a.and(&b), Spans::of(vec![span(2.0, 3.0), span(5.0, 6.0), span(8.0, 9.0)]));
        assert_eq!(a.and(&Spans::all()), a);
        assert!(a.and(&Spans::of(vec![span(3.5, 4.5)])).is_empty());
        assert_eq!(a.ends(), Some(span(1.0, 9.0)));
    }
}
