//! Balances of materials, and the ways in which they come, go and wait.

use std::collections::HashMap;

use super::frame::{Columns, Frame, Line, Part, Rows, at};
use super::limits::Limits;
use crate::lp::keys::{balance_key, demand_key, flow_key};
use crate::model::products;
use crate::model::{Closing, Flow, Late, Material, Model, Name, Period, Purchase, Sale};

/// The rows of materials, by name.
pub(super) struct Balances<'m>(HashMap<&'m Name, Lines>);

/// The rows of one material.
struct Lines {
    balance: Line,
    /// By sale tier; empty where what is sold may not be late.
    demand: Vec<Line>,
}

impl Balances<'_> {
    /// The balance of a material.
    pub(super) fn line(&self, material: &Name) -> Option<&Line> {
        self.0.get(material).map(|lines| &lines.balance)
    }
}

pub(super) fn rows<'m>(frame: &Frame<'m>, rows: &mut Rows) -> Balances<'m> {
    let Model { horizon, materials, .. } = frame.model;
    let lines = |(name, material): (&'m Name, &'m Material)| {
        let balance = rows.line(frame, |period| {
            let there = if period.position() == 0 { material.opening } else { 0.0 };
            Some((balance_key(name, horizon, period), 0.0 - there, 0.0 - there))
        });
        let demand = (1..).zip(&material.sale).map(|(tier, sale)| match sale.late {
            None => Line::new(),
            Some(_) => rows.line(frame, |period| {
                let key = demand_key(name, tier, horizon, period);
                Some((key, sale.at_least.at(period), sale.at_most.at(period)))
            }),
        });
        let demand = demand.collect();
        (name, Lines { balance, demand })
    };
    Balances(materials.iter().map(lines).collect())
}

pub(super) fn columns(frame: &Frame<'_>, balances: &Balances<'_>, limits: &Limits<'_>, columns: &mut Columns<'_>) {
    for (name, material) in &frame.model.materials {
        let Some(lines) = balances.0.get(name) else { continue };
        let mut flows = Flows { frame, name, lines, limits, parts: Vec::new(), columns };
        flows.discard(material);
        for (tier, purchase) in (1..).zip(&material.purchase) {
            flows.purchase(tier, purchase);
        }
        for (tier, sale) in (1..).zip(&material.sale) {
            flows.sale(tier, sale);
            if let Some(late) = &sale.late {
                flows.late(tier, late);
            }
        }
        flows.stock(material);
    }
}

/// Adds the columns of one material.
struct Flows<'a, 'c> {
    frame: &'a Frame<'a>,
    name: &'a Name,
    lines: &'a Lines,
    limits: &'a Limits<'a>,
    parts: Vec<Part>,
    columns: &'a mut Columns<'c>,
}

/// A column in one period: its bounds and what a unit adds to the aim.
type Numbers = ((f64, f64), f64);

impl Flows<'_, '_> {
    /// Adds one way's columns, one for each period that has numbers: `lines` have a part in it, each so many periods later.
    fn add(&mut self, flow: Flow, lines: &[(&Line, usize, f64)], numbers: impl Fn(Period) -> Option<Numbers>) {
        let terms = self.limits.of_flow(self.name, flow);
        for &period in &self.frame.by_name {
            let Some((bounds, aim)) = numbers(period) else { continue };
            for &(line, later, coefficient) in lines {
                self.parts.extend(at(line, period.position() + later).map(|row| Part::new(row, coefficient)));
            }
            self.limits.parts(&terms, period, &mut self.parts);
            let key = flow_key(self.name, flow, &self.frame.model.horizon, period);
            self.columns.push(key, bounds, aim, &mut self.parts);
        }
    }

    fn discard(&mut self, material: &Material) {
        let (frame, discard) = (self.frame, &material.discard);
        self.add(Flow::Discard, &[(&self.lines.balance, 0, -1.0)], |period| {
            Some(((0.0, discard.at_most.at(period)), frame.costs(discard.cost.at(period))))
        });
    }

    fn purchase(&mut self, tier: usize, purchase: &Purchase) {
        let frame = self.frame;
        self.add(Flow::Purchase(Some(tier)), &[(&self.lines.balance, 0, 1.0)], |period| {
            let bounds = (purchase.at_least.at(period), purchase.at_most.at(period));
            Some((bounds, frame.costs(purchase.price.at(period))))
        });
    }

    /// What is delivered. Where it may be late, its row of demand holds it.
    fn sale(&mut self, tier: usize, sale: &Sale) {
        let (frame, lines) = (self.frame, self.lines);
        let lines = [(&lines.balance, 0, -1.0), (&lines.demand[tier - 1], 0, 1.0)];
        self.add(Flow::Sale(Some(tier)), &lines, |period| {
            let bounds = match sale.late {
                None => (sale.at_least.at(period), sale.at_most.at(period)),
                Some(_) => (0.0, f64::INFINITY),
            };
            Some((bounds, frame.earns(sale.price.at(period))))
        });
    }

    /// What is not delivered yet: nothing at the end of the last period.
    fn late(&mut self, tier: usize, late: &Late) {
        let (frame, demand) = (self.frame, &self.lines.demand[tier - 1]);
        self.add(Flow::Late(Some(tier)), &[(demand, 0, 1.0), (demand, 1, -1.0)], |period| {
            let most = if frame.is_last(period) { 0.0 } else { late.at_most.at(period) };
            Some(((0.0, most), frame.costs(late.cost.at(period))))
        });
    }

    /// What is left: in every period where stock is carried; where only the closing one counts, in the last.
    fn stock(&mut self, material: &Material) {
        let (frame, balance) = (self.frame, &self.lines.balance);
        let Material { stock, closing, .. } = material;
        if stock.is_none() && closing.is_none() {
            return;
        }
        self.add(Flow::Stock, &[(balance, 0, -1.0), (balance, 1, 1.0)], |period| {
            let carried = stock
                .as_ref()
                .map(|stock| ((stock.at_least.at(period), stock.at_most.at(period)), stock.cost.at(period)));
            match closing {
                Some(Closing { at_least, worth }) if frame.is_last(period) => {
                    let ((least, most), cost) = carried.unwrap_or(((0.0, f64::INFINITY), 0.0));
                    let aim = products::sum([(*worth, frame.earned), (cost, -frame.earned)].into_iter());
                    Some(((least.max(*at_least), most), aim))
                }
                _ => carried.map(|(bounds, cost)| (bounds, frame.costs(cost))),
            }
        });
    }
}
