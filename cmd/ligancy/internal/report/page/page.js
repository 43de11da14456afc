(function () {
  'use strict';
  var D = JSON.parse(document.getElementById('data').textContent);
  var root = document.documentElement, readout = document.getElementById('readout');
  var svgNS = 'http://www.w3.org/2000/svg';
  root.classList.add('js');

  function each(selector, f) { Array.prototype.forEach.call(document.querySelectorAll(selector), f); }
  function numbers(n) { return n === null || n === undefined ? '' : show(n); }
  function show(n) {
    var t = Math.abs(n) >= 1e6 || n !== 0 && Math.abs(n) < 1e-4 ? n.toExponential(2) : String(Number(n.toPrecision(3)));
    if (Math.abs(n) < 10 && Math.abs(n) >= 0.0005 && t.indexOf('e') < 0) { t = n.toFixed(Math.abs(n) >= 1 ? 2 : 3); }
    return t.replace(/-/g, '\u2212');
  }

  // What is shown: which rivals, at which ligand value, on which curve.
  var state = { shown: D.shown.slice(), at: null, curve: 0, table: false };

  function read() {
    var h = location.hash.slice(1);
    if (h.indexOf('=') < 0) { return; }
    h.split('&').forEach(function (part) {
      var k = part.slice(0, part.indexOf('=')), v = part.slice(part.indexOf('=') + 1);
      try {
        if (k === 'show') { state.shown = v === '' ? [] : v.split(',').map(decodeURIComponent); }
        if (k === 'at' && isFinite(Number(v))) { state.at = Number(v); }
        if (k === 'curve' && D.curves[Number(v)] !== undefined) { state.curve = Number(v); }
        if (k === 'table') { state.table = v === '1'; }
      } catch (e) { /* a link that was cut short shows what it can */ }
    });
  }

  function write() {
    var parts = ['show=' + state.shown.map(encodeURIComponent).join(',')];
    if (state.at !== null) { parts.push('at=' + state.at, 'curve=' + state.curve); }
    if (state.table) { parts.push('table=1'); }
    var hash = '#' + parts.join('&');
    try { history.replaceState(null, '', hash); } catch (e) { location.replace(hash); }
  }

  // Rivals over the leader.
  function rivalNamed(name) { return D.rivals.filter(function (r) { return r.name === name; })[0]; }
  function visible(r) { return state.shown.indexOf(r.name) >= 0; }
  function drawRivals(peek) {
    D.rivals.forEach(function (r) {
      var on = visible(r) || r.id === peek;
      each('.rival[data-m="' + r.id + '"],.rival-key[data-m="' + r.id + '"]', function (g) { g.setAttribute('visibility', on ? 'visible' : 'hidden'); });
      each('.rival-button[data-m="' + r.id + '"]', function (b) { b.setAttribute('aria-pressed', String(visible(r))); });
    });
    residualsOf(peek);
  }
  function toggle(id) {
    D.rivals.forEach(function (r) {
      if (r.id !== id) { return; }
      var i = state.shown.indexOf(r.name);
      if (i >= 0) { state.shown.splice(i, 1); } else { state.shown.push(r.name); }
    });
    drawRivals(null);
    write();
    say();
  }

  // The residuals of a mechanism that is pointed at, in place of the leader's.
  function residualsOf(id) {
    var r = id === null ? undefined : D.rivals.filter(function (q) { return q.id === id; })[0];
    each('.residuals', function (g) { g.setAttribute('opacity', r && r.r ? '0.25' : '1'); });
    each('.residuals-of', function (g) {
      while (g.firstChild) { g.removeChild(g.firstChild); }
      if (!r || !r.r) { return; }
      var a = axisBeside(g);
      if (!a) { return; }
      var d = '';
      D.points.forEach(function (p, i) {
        var e = r.r[i], x = place(a, p.x);
        if (e === null || x === null || a.c.indexOf(p.c) < 0) { return; }
        var y = a.y0 + (Math.max(a.v0, Math.min(a.v1, e)) - a.v0) / (a.v1 - a.v0) * (a.y1 - a.y0);
        d += 'M' + (x - 2.6) + ' ' + y + 'a2.6 2.6 0 1 0 5.2 0a2.6 2.6 0 1 0-5.2 0z';
      });
      var path = document.createElementNS(svgNS, 'path');
      path.setAttribute('d', d);
      path.setAttribute('class', 's-mu f-gr');
      path.setAttribute('stroke-width', '1.3');
      g.appendChild(path);
    });
  }

  // Axes of the figures that share the ligand.
  function axisOf(g) {
    var d = g.dataset, a = { g: g, shows: g.dataset.shows };
    ['x0', 'x1', 'l0', 'l1', 't', 'b', 'z', 'y0', 'y1', 'v0', 'v1'].forEach(function (k) {
      a[k] = d[k] === undefined ? null : Number(d[k]);
    });
    a.c = (d.c || '').split(' ').filter(function (s) { return s !== ''; }).map(Number);
    return a;
  }
  function axisBeside(g) {
    for (var e = g.nextElementSibling; e; e = e.nextElementSibling) {
      if (e.classList.contains('axis')) { return axisOf(e); }
    }
    return null;
  }
  var axes = [];
  each('svg .axis', function (g) { axes.push(axisOf(g)); });

  function place(a, x) {
    if (x <= 0) { return a.z; }
    var at = a.x0 + (Math.log10(x) - a.l0) / (a.l1 - a.l0) * (a.x1 - a.x0);
    return at < a.x0 - 0.5 || at > a.x1 + 0.5 ? null : at;
  }

  // The hairline at one ligand value through every figure.
  function hairline() {
    axes.forEach(function (a) {
      var x = state.at === null ? null : place(a, state.at);
      if (!a.line) {
        a.line = document.createElementNS(svgNS, 'line');
        a.line.setAttribute('class', 'hair');
        a.line.setAttribute('y1', a.t);
        a.line.setAttribute('y2', a.b);
        a.g.parentNode.appendChild(a.line);
      }
      a.line.setAttribute('visibility', x === null ? 'hidden' : 'visible');
      if (x !== null) { a.line.setAttribute('x1', x); a.line.setAttribute('x2', x); }
      dot(a, x);
    });
  }
  function dot(a, x) {
    var y = a.c.indexOf(state.curve) < 0 ? null : along(tableOf(a), state.curve, state.at);
    if (y === null && !a.dot) { return; }
    if (!a.dot) {
      a.dot = document.createElementNS(svgNS, 'circle');
      a.dot.setAttribute('r', '4');
      a.dot.setAttribute('class', 'hair-dot f-tx');
      a.g.parentNode.appendChild(a.dot);
    }
    var on = x !== null && y !== null && y >= a.v0 && y <= a.v1;
    a.dot.setAttribute('visibility', on ? 'visible' : 'hidden');
    if (on) { a.dot.setAttribute('cx', x); a.dot.setAttribute('cy', a.y0 + (y - a.v0) / (a.v1 - a.v0) * (a.y1 - a.y0)); }
  }

  // What a field's linear axis shows of the leader; nothing where it shows something else.
  function tableOf(a) { return a.shows === 'slope' ? D.leader.n : a.shows === 'response' && a.g.closest('#fig-curves') ? D.leader.y : null; }

  // A mechanism's value along its curve, between the sampled points.
  function along(table, curve, x) {
    var row = table && table[curve];
    if (!row || !(x > 0)) { return null; }
    var t = (Math.log10(x) - D.grid[0]) / (D.grid[1] - D.grid[0]) * (row.length - 1), i = Math.floor(t);
    if (t < 0 || i > row.length - 1) { return null; }
    if (i === row.length - 1) { return row[i]; }
    if (row[i] === null || row[i + 1] === null) { return null; }
    return row[i] + (t - i) * (row[i + 1] - row[i]);
  }

  // The one readout of the page.
  function node(tag, text, cls) {
    var e = document.createElement(tag);
    if (cls) { e.className = cls; }
    e.textContent = text;
    return e;
  }
  function nH() { var f = document.createDocumentFragment(); f.appendChild(node('i', 'n')); f.appendChild(node('sub', 'H')); return f; }
  function levelAt(x) {
    for (var i = 0; i < D.levels.length; i++) {
      if (Math.abs(D.levels[i].x - x) <= 1e-9 + 1e-4 * Math.abs(x)) { return i; }
    }
    return -1;
  }
  function say() {
    if (state.at === null || D.curves.length === 0) { return; }
    var k = levelAt(state.at), out = document.createDocumentFragment();
    out.appendChild(document.createTextNode('at ' + (k >= 0 ? D.levels[k].t : show(state.at)) + (D.unit ? ' ' + D.unit : '')));
    if (D.curves.length > 1) {
      out.appendChild(document.createTextNode(', '));
      out.appendChild(node('b', D.curves[state.curve], 'f-l' + (state.curve % 5 + 1)));
    }
    out.appendChild(document.createTextNode(': ' + measured(k) ));
    out.appendChild(document.createTextNode(D.leader.name + ' ' + (numbers(along(D.leader.y, state.curve, state.at)) || '\u2013')));
    var n = along(D.leader.n, state.curve, state.at);
    if (n !== null) {
      out.appendChild(document.createTextNode(', '));
      out.appendChild(nH());
      out.appendChild(document.createTextNode(' ' + n.toFixed(2)));
    }
    D.rivals.filter(visible).forEach(function (r) {
      var y = along(r.y, state.curve, state.at);
      if (y !== null) { out.appendChild(document.createTextNode('; ' + r.name + ' ' + numbers(y))); }
    });
    tell(out);
  }
  function measured(k) {
    if (k < 0) { return ''; }
    var here = D.points.filter(function (p) { return p.c === state.curve && p.l === k; });
    if (here.length === 0) { return 'not measured; '; }
    if (here.length > 8) {
      var sum = here.reduce(function (s, p) { return s + p.y; }, 0);
      return 'measured, mean of ' + here.length + ', ' + show(sum / here.length) + '; ';
    }
    return 'measured ' + here.map(function (p) { return (p.p >= 0 && D.preps.length > 1 ? D.preps[p.p] + ' ' : '') + numbers(p.y); }).join(', ') +
      ' (row' + (here.length > 1 ? 's ' : ' ') + here.map(function (p) { return p.w; }).join(', ') +
      '; residual' + (here.length > 1 ? 's ' : ' ') + here.map(function (p) { return p.r === null ? '\u2013' : p.r.toFixed(1).replace('-', '\u2212'); }).join(', ') + '); ';
  }
  function tell(what) {
    while (readout.firstChild) { readout.removeChild(readout.firstChild); }
    readout.appendChild(what);
    readout.hidden = false;
  }
  function into(slot) {
    if (slot && readout.parentNode !== slot) { slot.appendChild(readout); }
  }
  function slotNear(e) {
    var f = e.closest('figure'), s = f && f.querySelector('.slot');
    if (s) { return s; }
    var section = e.closest('section');
    s = section && section.querySelector('.slot');
    if (!s && section) {
      s = document.createElement('div');
      s.className = 'slot';
      section.appendChild(s);
    }
    return s;
  }

  // Pointing: mouse, pen and finger.
  function pointed(ev) {
    var svg = ev.target.closest && ev.target.closest('.reads svg');
    if (!svg) { return; }
    var box = svg.getBoundingClientRect(), view = svg.viewBox.baseVal;
    var x = (ev.clientX - box.left) * view.width / box.width, y = (ev.clientY - box.top) * view.height / box.height;
    var best = null, least = Infinity;
    axes.forEach(function (a) {
      if (a.g.ownerSVGElement !== svg) { return; }
      var low = a.z === null ? a.x0 : Math.min(a.z, a.x0), dx = Math.max(low - x, x - a.x1, 0), dy = Math.max(a.t - y, y - a.b, 0);
      if (dx + dy < least) { least = dx + dy; best = a; }
    });
    if (!best) { return; }
    readout.setAttribute('aria-live', 'off');
    at(best, x);
    nearest(best, y);
    into(slotNear(svg));
    hairline();
    say();
  }
  function at(a, x) {
    var best = null, least = 7;
    D.levels.forEach(function (l) {
      var p = place(a, l.x);
      if (p !== null && Math.abs(p - x) < least) { least = Math.abs(p - x); best = l.x; }
    });
    state.at = best !== null ? best : Math.pow(10, a.l0 + (Math.max(a.x0, Math.min(a.x1, x)) - a.x0) / (a.x1 - a.x0) * (a.l1 - a.l0));
  }
  function nearest(a, y) {
    if (a.c.length === 1) { state.curve = a.c[0]; return; }
    var table = tableOf(a), least = Infinity;
    if (table === null) { return; }
    a.c.forEach(function (c) {
      var v = along(table, c, state.at);
      if (v === null) { return; }
      var d = Math.abs(a.y0 + (v - a.v0) / (a.v1 - a.v0) * (a.y1 - a.y0) - y);
      if (d < least) { least = d; state.curve = c; }
    });
  }
  document.addEventListener('pointermove', pointed);
  document.addEventListener('pointerdown', function (ev) {
    pointed(ev);
    if (state.at !== null && ev.target.closest && ev.target.closest('.reads svg')) { write(); }
  });

  // Keys: left and right step through the tested levels, up and down through the curves.
  function step(by) {
    if (D.levels.length === 0) { return; }
    var i = -1;
    if (state.at === null) { i = by > 0 ? 0 : D.levels.length - 1; } else {
      D.levels.forEach(function (l, k) { if (by > 0 ? l.x <= state.at * (1 + 1e-6) : l.x < state.at * (1 - 1e-6)) { i = k; } });
      i = by > 0 ? Math.min(i + 1, D.levels.length - 1) : Math.max(i, 0);
    }
    state.at = D.levels[i].x;
  }
  each('[data-keys]', function (e) {
    e.addEventListener('keydown', function (ev) {
      var n = D.curves.length;
      switch (ev.key) {
        case 'ArrowRight': step(1); break;
        case 'ArrowLeft': step(-1); break;
        case 'Home': state.at = null; step(1); break;
        case 'End': state.at = null; step(-1); break;
        case 'ArrowDown': state.curve = (state.curve + 1) % n; break;
        case 'ArrowUp': state.curve = (state.curve + n - 1) % n; break;
        case 'Escape': quiet(); return;
        default: return;
      }
      if (ev.altKey || ev.ctrlKey || ev.metaKey) { return; }
      if (state.at === null) { step(1); }
      ev.preventDefault();
      readout.setAttribute('aria-live', 'polite');
      into(slotNear(e));
      hairline();
      say();
      write();
    });
  });
  function quiet() {
    state.at = null;
    readout.hidden = true;
    hairline();
    write();
  }
  document.addEventListener('keydown', function (ev) { if (ev.key === 'Escape' && state.at !== null) { quiet(); } });

  // Numbers that say what they are.
  each('.say', function (b) {
    function on() {
      readout.setAttribute('aria-live', 'polite');
      into(slotNear(b));
      tell(document.createTextNode(b.dataset.say));
    }
    b.addEventListener('pointerenter', on);
    b.addEventListener('focus', on);
    b.addEventListener('click', on);
  });

  // Mechanisms: pointing shows one over the first figure, pressing keeps it there.
  function describe(id, from) {
    var r = D.rivals.filter(function (q) { return q.id === id; })[0];
    if (!r) { return; }
    into(slotNear(from));
    tell(document.createTextNode(r.name + ': its curves and its residuals are laid over the first figure while you point at it; press to keep the curves there' +
      (r.behind === null ? '' : '; AICc ' + r.behind.toFixed(1) + ' behind')));
  }
  each('.peek, .stands', function (e) {
    var id = e.dataset.m;
    function on() { if (D.rivals.some(function (r) { return r.id === id; })) { drawRivals(id); describe(id, e); } }
    function off() { drawRivals(null); }
    e.addEventListener('pointerenter', on);
    e.addEventListener('pointerleave', off);
    e.addEventListener('focus', on);
    e.addEventListener('blur', off);
    e.addEventListener('click', function () { toggle(id); });
  });
  each('.rival-button', function (b) {
    b.addEventListener('click', function () { toggle(b.dataset.m); });
    b.addEventListener('focus', function () { if (b.matches(':focus-visible')) { residualsOf(b.dataset.m); } });
    b.addEventListener('blur', function () { residualsOf(null); });
    b.addEventListener('pointerenter', function () { residualsOf(b.dataset.m); });
    b.addEventListener('pointerleave', function () { residualsOf(null); });
  });
  each('.buttons', function (e) { e.hidden = false; });

  // The first figure as a table.
  var asTable = document.getElementById('as-table'), figureTable = document.getElementById('figure-table');
  function table() {
    if (!asTable) { return; }
    asTable.setAttribute('aria-expanded', String(state.table));
    figureTable.hidden = !state.table;
  }
  if (asTable) { asTable.addEventListener('click', function () { state.table = !state.table; table(); write(); }); }

  function restore() {
    read();
    drawRivals(null);
    table();
    hairline();
    if (state.at !== null) { into(document.querySelector('.reads .slot')); say(); }
  }
  window.addEventListener('hashchange', function () { if (location.hash.indexOf('=') > 0) { restore(); } });
  restore();
})();
