// The report's 3D view: turn with the mouse or a finger, zoom with the wheel, fixed views and parts by the buttons.
// Where the browser has no WebGL, the still picture stays in its place.
(function () {
  "use strict";
  const box = document.getElementById("view3d");
  if (!box || typeof THREE === "undefined") return;
  const canvas = document.createElement("canvas");
  const context = canvas.getContext("webgl2", { antialias: true, alpha: true });
  if (!context) return;

  const given = JSON.parse(document.getElementById("scene").textContent);
  const floats = (text) => new Float32Array(bytes(text));
  const integers = (text) => new Uint32Array(bytes(text));
  function bytes(text) {
    const raw = atob(text);
    const out = new Uint8Array(raw.length);
    for (let i = 0; i < raw.length; i++) out[i] = raw.charCodeAt(i);
    return out.buffer;
  }

  const renderer = new THREE.WebGLRenderer({ canvas, context, antialias: true, alpha: true });
  const scene = new THREE.Scene();
  const camera = new THREE.OrthographicCamera(-1, 1, 1, -1, 0, 8 * given.reach);
  camera.up.set(0, 0, 1);
  scene.add(camera, new THREE.AmbientLight(0xffffff, 1.6));
  const lamp = new THREE.DirectionalLight(0xffffff, 1.8);
  lamp.position.set(0.4, 0.8, 1);
  camera.add(lamp);

  // Opaque parts are flat: their edges are sharp. Translucent ones hide nothing that lies behind them.
  const groups = {};
  for (const kind of given.kinds) {
    const clear = kind.opacity < 1;
    const material = new THREE.MeshLambertMaterial({
      color: new THREE.Color(kind.colour),
      opacity: kind.opacity,
      transparent: clear,
      depthWrite: !clear,
      flatShading: kind.part !== "skin",
      side: kind.part === "skin" ? THREE.DoubleSide : THREE.FrontSide,
    });
    groups[kind.part] = new THREE.Group();
    groups[kind.part].userData.material = material;
    groups[kind.part].visible = kind.shown;
    scene.add(groups[kind.part]);
  }
  for (const part of given.parts) {
    const geometry = new THREE.BufferGeometry();
    geometry.setAttribute("position", new THREE.BufferAttribute(floats(part.position), 3));
    geometry.setIndex(new THREE.BufferAttribute(integers(part.index), 1));
    geometry.computeVertexNormals();
    groups[part.part].add(new THREE.Mesh(geometry, groups[part.part].userData.material));
  }
  const ink = new THREE.LineBasicMaterial({ color: new THREE.Color("#5a5a5a") });
  for (const line of given.lines) {
    const geometry = new THREE.BufferGeometry();
    geometry.setAttribute("position", new THREE.BufferAttribute(floats(line), 3));
    groups.skin.add(new THREE.LineLoop(geometry, ink));
  }

  const controls = new THREE.OrbitControls(camera, canvas);
  controls.zoomToCursor = true;
  canvas.style.touchAction = "pan-y"; // a finger that moves up or down still scrolls the page
  controls.addEventListener("change", draw);
  let shown = given.views[0];

  function draw() {
    renderer.render(scene, camera);
  }
  function fit() {
    const wide = canvas.clientWidth || 1, high = canvas.clientHeight || 1;
    renderer.setPixelRatio(Math.min(window.devicePixelRatio || 1, 2));
    renderer.setSize(wide, high, false);
    const half = Math.max(shown.size[0] / wide, shown.size[1] / high) * 0.53;
    Object.assign(camera, { left: -half * wide, right: half * wide, top: half * high, bottom: -half * high });
    camera.updateProjectionMatrix();
    draw();
  }
  function look(view) {
    shown = view;
    const target = new THREE.Vector3(...view.target);
    camera.position.copy(new THREE.Vector3(...view.eye).normalize().multiplyScalar(4 * given.reach).add(target));
    camera.zoom = 1;
    controls.target.copy(target);
    controls.update();
    fit();
  }

  const bar = box.querySelector(".views");
  for (const view of given.views) {
    const button = document.createElement("button");
    button.type = "button";
    button.textContent = view.name;
    button.addEventListener("click", () => look(view));
    bar.append(button);
  }
  const legend = box.querySelector(".parts");
  for (const kind of given.kinds) {
    const label = document.createElement("label");
    const tick = document.createElement("input");
    tick.type = "checkbox";
    tick.checked = kind.shown;
    tick.addEventListener("change", () => {
      groups[kind.part].visible = tick.checked;
      draw();
    });
    const chip = document.createElement("i");
    chip.style.background = kind.colour;
    label.append(tick, chip, kind.label);
    legend.append(label);
  }
  box.querySelector(".stage").prepend(canvas);
  box.classList.add("live");
  new ResizeObserver(fit).observe(canvas);
  look(given.views[0]);
})();
