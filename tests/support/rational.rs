//! A small simplex in fractions: a dense tableau in two phases with Bland's rule, to hold the program's own exact arithmetic against.
//!
//! It has nothing in common with that but the answer: programs are brought to equations over variables that are at least 0.

use std::cmp::Ordering;
use std::str::FromStr;

use dashu_int::{IBig, UBig};
use dashu_ratio::RBig;
use millreeve::lp::Program;

/// What a program comes to.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Found {
    /// The levels of the best plan and its aim.
    Plan(Vec<RBig>, RBig),
    /// No plan keeps all rules.
    Nothing,
    /// Nothing limits the aim, or the second aim among the best plans.
    NoEnd,
}

/// The plan that is best for the program's aim, then has the least sum of `second` times level, then the least first level, and so on.
pub(crate) fn best(program: &Program, second: &[f64]) -> Found {
    let Some(mut tableau) = Tableau::of(program) else { return Found::Nothing };
    if !tableau.find_a_plan() {
        return Found::Nothing;
    }
    let sign = RBig::from(if program.sense.sign() > 0.0 { 1 } else { -1 });
    let mut aims: Vec<Vec<RBig>> = vec![
        program.columns.iter().map(|column| &sign * fraction(column.aim)).collect(),
        second.iter().map(|&weight| fraction(weight)).collect(),
    ];
    let count = program.columns.len();
    let one_at = |at| (0..count).map(|other| RBig::from(u8::from(other == at))).collect();
    aims.extend((0..count).map(one_at));
    if !tableau.minimise(&aims) {
        return Found::NoEnd;
    }
    let levels = tableau.levels();
    let terms = program.columns.iter().zip(&levels).map(|(column, level)| fraction(column.aim) * level);
    let aim = terms.fold(fraction(program.offset), |sum, term| sum + term);
    Found::Plan(levels, aim)
}

/// A double as the shortest decimal that reads as it.
pub(crate) fn fraction(value: f64) -> RBig {
    let text = format!("{value}");
    let (whole, places) = text.split_once('.').unwrap_or((&text, ""));
    let digits = IBig::from_str(&format!("{whole}{places}")).unwrap();
    RBig::from_parts(digits, UBig::from(10_u8).pow(places.len()))
}

/// A column as `from + Σ factor · variable`, the variables being at least 0.
struct Shape {
    from: RBig,
    parts: Vec<(usize, RBig)>,
}

/// Equations `Σ row · variables = right` with `right` at least 0, each solved for a variable of its own.
struct Tableau {
    shapes: Vec<Shape>,
    rows: Vec<Vec<RBig>>,
    right: Vec<RBig>,
    basics: Vec<usize>,
    /// Variables from here on stand for what a row lacks; they must vanish.
    lacks: usize,
}

/// Terms over variables, and the sum they are to have: at most that, or exactly.
struct Rule {
    terms: Vec<(usize, RBig)>,
    right: RBig,
    equal: bool,
}

impl Tableau {
    /// `None` where bounds cross.
    fn of(program: &Program) -> Option<Self> {
        let mut shapes = Vec::new();
        let mut rules = Vec::new();
        let mut count = 0;
        let mut variable = || {
            count += 1;
            count - 1
        };
        for column in &program.columns {
            if column.lower > column.upper {
                return None;
            }
            let (from, signs): (f64, &[i32]) = match (column.lower.is_finite(), column.upper.is_finite()) {
                (true, _) => (column.lower, &[1]),
                (false, true) => (column.upper, &[-1]),
                (false, false) => (0.0, &[1, -1]),
            };
            let parts: Vec<_> = signs.iter().map(|&sign| (variable(), RBig::from(sign))).collect();
            if column.lower.is_finite() && column.upper.is_finite() {
                let right = fraction(column.upper) - fraction(column.lower);
                rules.push(Rule { terms: parts.clone(), right, equal: false });
            }
            shapes.push(Shape { from: fraction(from), parts });
        }
        for (at, row) in program.rows.iter().enumerate() {
            if row.lower > row.upper {
                return None;
            }
            rules.extend(row_rules(program, at, &shapes));
        }
        Some(Self::from_rules(shapes, rules, count))
    }

    fn from_rules(shapes: Vec<Shape>, rules: Vec<Rule>, count: usize) -> Self {
        let slacks = rules.iter().filter(|rule| !rule.equal).count();
        let lacks = count + slacks;
        let width = lacks + rules.len();
        let mut tableau = Self { shapes, rows: Vec::new(), right: Vec::new(), basics: Vec::new(), lacks };
        let mut slack = count;
        for (at, rule) in rules.into_iter().enumerate() {
            let mut row = vec![RBig::ZERO; width];
            for (variable, factor) in rule.terms {
                row[variable] += factor;
            }
            if !rule.equal {
                row[slack] = RBig::ONE;
                slack += 1;
            }
            let negative = rule.right < RBig::ZERO;
            if negative {
                row = row.into_iter().map(|entry| -entry).collect();
            }
            row[lacks + at] = RBig::ONE;
            tableau.right.push(if negative { -rule.right } else { rule.right });
            tableau.rows.push(row);
            tableau.basics.push(lacks + at);
        }
        tableau
    }

    /// Makes all that lacks vanish, if that can be.
    fn find_a_plan(&mut self) -> bool {
        let width = self.lacks + self.rows.len();
        let mut costs = vec![vec![RBig::ZERO; width]];
        costs[0][self.lacks..].fill(RBig::ONE);
        let bounded = self.run(costs, width);
        assert!(bounded, "a sum of numbers that are at least 0 has a least");
        let lacks = self.lacks;
        let lacking = self.basics.iter().zip(&self.right).any(|(&basic, right)| basic >= lacks && *right > RBig::ZERO);
        if lacking {
            return false;
        }
        // What still stands for nothing leaves, or its equation says nothing.
        let mut at = 0;
        while at < self.rows.len() {
            if self.basics[at] < lacks {
                at += 1;
            } else if let Some(entrant) = (0..lacks).find(|&variable| self.rows[at][variable] != RBig::ZERO) {
                self.pivot(at, entrant, &mut Vec::new());
                at += 1;
            } else {
                self.rows.remove(at);
                self.right.remove(at);
                self.basics.remove(at);
            }
        }
        true
    }

    /// Makes the first aim of the columns small, then the second, and so on; whether there is an end to that.
    fn minimise(&mut self, aims: &[Vec<RBig>]) -> bool {
        let width = self.rows.first().map_or(self.lacks, Vec::len);
        let costs = aims.iter().map(|aim| {
            let mut cost = vec![RBig::ZERO; width];
            for (shape, price) in self.shapes.iter().zip(aim) {
                for (variable, factor) in &shape.parts {
                    cost[*variable] += factor * price;
                }
            }
            cost
        });
        let costs = costs.collect();
        self.run(costs, self.lacks)
    }

    /// Bland's rule over the first `width` variables.
    fn run(&mut self, mut costs: Vec<Vec<RBig>>, width: usize) -> bool {
        for (row, &basic) in self.rows.iter().zip(&self.basics) {
            for cost in &mut costs {
                take_off(cost, row, basic);
            }
        }
        let improves = |costs: &[Vec<RBig>], variable: usize| {
            let first = costs.iter().map(|cost| cost[variable].cmp(&RBig::ZERO)).find(|order| order.is_ne());
            first == Some(Ordering::Less)
        };
        while let Some(entrant) = (0..width).find(|&variable| improves(&costs, variable)) {
            let ratios = (0..self.rows.len()).filter(|&at| self.rows[at][entrant] > RBig::ZERO);
            let ratio = |at: usize| (&self.right[at] / &self.rows[at][entrant], self.basics[at]);
            let Some(at) = ratios.min_by(|&a, &b| ratio(a).cmp(&ratio(b))) else { return false };
            self.pivot(at, entrant, &mut costs);
        }
        true
    }

    fn pivot(&mut self, at: usize, entrant: usize, costs: &mut Vec<Vec<RBig>>) {
        let pivot = self.rows[at][entrant].clone();
        for entry in self.rows[at].iter_mut().filter(|entry| **entry != RBig::ZERO) {
            *entry = &*entry / &pivot;
        }
        self.right[at] = &self.right[at] / &pivot;
        let row = self.rows[at].clone();
        for other in (0..self.rows.len()).filter(|&other| other != at) {
            let multiple = take_off(&mut self.rows[other], &row, entrant);
            let less = multiple * &self.right[at];
            self.right[other] -= less;
        }
        for cost in costs {
            take_off(cost, &row, entrant);
        }
        self.basics[at] = entrant;
    }

    fn levels(&self) -> Vec<RBig> {
        let value = |variable: usize| {
            let at = self.basics.iter().position(|&basic| basic == variable);
            at.map_or(RBig::ZERO, |at| self.right[at].clone())
        };
        let level = |shape: &Shape| {
            shape.parts.iter().fold(shape.from.clone(), |level, (variable, factor)| level + factor * value(*variable))
        };
        self.shapes.iter().map(level).collect()
    }
}

/// Takes a multiple of `row` off `other`, so that its entry of `variable` vanishes; the multiple.
fn take_off(other: &mut [RBig], row: &[RBig], variable: usize) -> RBig {
    let multiple = other[variable].clone();
    if multiple != RBig::ZERO {
        for (entry, less) in other.iter_mut().zip(row).filter(|(_, less)| **less != RBig::ZERO) {
            *entry -= &multiple * less;
        }
    }
    multiple
}

/// The rules that a row's bounds make.
fn row_rules(program: &Program, at: usize, shapes: &[Shape]) -> Vec<Rule> {
    let mut terms = Vec::new();
    let mut constant = RBig::ZERO;
    for (column, shape) in program.columns.iter().zip(shapes) {
        for (_, value) in column.entries.iter().filter(|entry| entry.0.0 == at) {
            let value = fraction(*value);
            constant += &value * &shape.from;
            terms.extend(shape.parts.iter().map(|(variable, factor)| (*variable, factor * &value)));
        }
    }
    let row = &program.rows[at];
    let rule = |bound: f64, sign: i32, equal: bool| Rule {
        terms: terms.iter().map(|(variable, factor)| (*variable, factor * RBig::from(sign))).collect(),
        right: (fraction(bound) - &constant) * RBig::from(sign),
        equal,
    };
    if row.lower.total_cmp(&row.upper).is_eq() {
        return vec![rule(row.upper, 1, true)];
    }
    let upper = row.upper.is_finite().then(|| rule(row.upper, 1, false));
    let lower = row.lower.is_finite().then(|| rule(row.lower, -1, false));
    upper.into_iter().chain(lower).collect()
}
