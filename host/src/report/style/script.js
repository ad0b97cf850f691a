(function () {
  var d = document;
  d.querySelectorAll(".frame").forEach(function (frame) {
    var picture = frame.querySelector("svg[data-x]");
    if (picture && frame.scrollWidth > frame.clientWidth) {
      var width = picture.viewBox.baseVal.width;
      frame.scrollLeft = Math.max(0, picture.dataset.x * picture.clientWidth / width - frame.clientWidth / 2 + 46);
    }
  });
  var command = d.querySelector(".cmd");
  if (command && navigator.clipboard) {
    var button = d.createElement("button");
    button.type = "button";
    button.textContent = "Copy the command";
    button.onclick = function () {
      navigator.clipboard.writeText(command.textContent).then(function () { button.textContent = "Copied"; });
    };
    command.after(button);
  }
  addEventListener("beforeprint", function () {
    d.querySelectorAll("details").forEach(function (each) { each.open = true; });
  });
})();
